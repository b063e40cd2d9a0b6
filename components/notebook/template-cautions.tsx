import { Caution } from '@/components/ui/caution';
import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { inWords, plain } from '@/components/words/counts';
import { formatPercent } from '@/lib/figures/format';
import type { ParameterDeclaration, Prior } from '@/lib/templates';
import { accurateKappa, backgroundTermsFor } from './accuracy';
import type { TemplateSettings } from './prediction';
import { priorEnds } from './prior-values';

/** Lowest and highest mass that the priors allow; null without fields. */
export function massRangeOf(
  parameters: readonly ParameterDeclaration[],
  priors: Readonly<Record<string, Prior>>,
): [number, number] | null {
  const ends = parameters
    .filter(({ role }) => role === 'mass')
    .map((declaration) => priorEnds(priors[declaration.name] ?? declaration.defaultPrior, declaration));
  return ends.length ? [Math.min(...ends.map(([lo]) => lo)), Math.max(...ends.map(([, hi]) => hi))] : null;
}

/** Share of the envelope to which the page asks the leading template to hold. */
const share = 0.05;

/** The exact shape holds at every κ of an isosceles triangle; what it can't know is the rest of the triangle. */
function ExactCautions({ highest }: { highest: number }) {
  return (
    <Caution>
      Exact at tree level for isosceles triangles. Others are evaluated at{' '}
      <Num>
        <Sym base="κ" /> = 2<Sym base="k" sub="3" />
        /(
        <Sym base="k" sub="1" /> + <Sym base="k" sub="2" />)
      </Num>
      ; their further corrections, of the order of <Sym base="κ" />
      ², are left out. The bins reach{' '}
      <Num>
        <Sym base="κ" /> = {plain(highest, 3)}
      </Num>
      .
    </Caution>
  );
}

/** Three leading terms: what is beyond them, and where light fields stop being this simple. */
function LightCautions() {
  return (
    <>
      <Caution>
        The leading terms of the squeezed limit. What follows them are powers of <Sym base="κ" /> from{' '}
        <Sym base="κ" /> on, which the background has to take up.
      </Caution>
      <Caution>
        Towards <Sym base="ν" /> = 3/2, the massless field, the shape grows without bound and depends on how
        long inflation lasts: it is meant where (3/2 − <Sym base="ν" />) ln 1/
        <Sym base="κ" /> is not small.
      </Caution>
    </>
  );
}

/** What limits the template at this cut and these masses. */
export function TemplateCautions({
  settings,
  parameters,
  priors,
  highest,
}: {
  settings: TemplateSettings;
  parameters: readonly ParameterDeclaration[];
  priors: Readonly<Record<string, Prior>>;
  /** Highest κ that is kept. */
  highest: number;
}) {
  const range = massRangeOf(parameters, priors);
  if (!range) return null;
  if (settings.id === 'locked-exact') return <ExactCautions highest={highest} />;
  if (settings.id === 'light') return <LightCautions />;
  const vertex = settings.options.vertex;
  const reach = accurateKappa(range[0], range[1], share, vertex === 1 ? [1] : vertex === 2 ? [2] : [1, 2]);
  const powers = Array.isArray(settings.options.background) ? (settings.options.background as number[]) : [];
  const positive = powers.filter((power) => power > 0).length;
  const wanted = backgroundTermsFor(range[1]);
  return (
    <>
      <Caution>
        The squeezed template holds to {formatPercent(share)} of the envelope for{' '}
        <Num>
          <Sym base="κ" /> ≤ {plain(reach, 3)}
        </Num>{' '}
        at the masses that the priors allow; the bins reach{' '}
        <Num>
          <Sym base="κ" /> = {plain(highest, 3)}
        </Num>
        {highest > reach * 1.0001 ? ', beyond that.' : '.'}
      </Caution>
      {settings.id === 'locked-squeezed' && positive < wanted ? (
        <Caution>
          The smooth part of the exchange is left to the background. For masses up to{' '}
          <Num>
            <Sym base="μ" /> = {plain(range[1], 2)}
          </Num>{' '}
          it needs {inWords(wanted)} powers of <Sym base="κ" /> from 1 on to keep the bias near{' '}
          {formatPercent(0.01)}; there {positive === 1 ? 'is' : 'are'} {inWords(positive)}.
        </Caution>
      ) : null}
    </>
  );
}
