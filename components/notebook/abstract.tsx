import { Fragment } from 'react';
import { fitPredicate } from '@/components/fit/fit-words';
import { judged, meetsGate } from '@/components/fit/quantities';
import { Sym } from '@/components/ui/sym';
import { capital, counted, inWords } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { withoutBins } from '@/components/words/left-out';
import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';
import { templateInWords } from './template-words';

/** One power of κ; −1 with its true minus. */
function Power({ power }: { power: number }) {
  if (power === 0) return 'a constant';
  return (
    <>
      <Sym base="κ" />
      {power === 1 ? null : <sup>{String(power).replace('-', '−')}</sup>}
    </>
  );
}

/** "background in κ and κ²" */
function Background({ options }: { options: Record<string, unknown> }) {
  const powers = Array.isArray(options.background) ? (options.background as number[]) : [];
  if (!powers.length) return 'no background';
  return (
    <>
      background in{' '}
      {powers.map((power, i) => (
        <Fragment key={power}>
          {i === 0 ? '' : i === powers.length - 1 ? ' and ' : ', '}
          <Power power={power} />
        </Fragment>
      ))}
    </>
  );
}

/** "two mixed fields with free phases; background in κ and κ²" */
export function TemplateInWords({
  template: { id, options },
  initial = false,
}: {
  template: { id: string; options: Record<string, unknown> };
  /** True at the beginning of a sentence. */
  initial?: boolean;
}) {
  const words = templateInWords(id, fieldCount(options.fields));
  return (
    <>
      {initial ? capital(words) : words}
      {id === 'locked-squeezed' && options.phases === 'free' ? ' with free phases' : ''};{' '}
      <Background options={options} />
    </>
  );
}

/** What the last fit came to, with its gate while that isn't met. */
export function fitInWords(fit: Fit | null): string {
  if (!fit) return 'No fit yet.';
  const all = judged(fit.diagnostics);
  const met = all.filter((each) => meetsGate(each, fit.gate.target)).length;
  const gate =
    all.length && met < all.length && fit.progress.draws > 0
      ? `; ${met === 0 ? 'none' : inWords(met)} of ${inWords(all.length)} quantities ${met === 1 ? 'meets' : 'meet'} the gate`
      : '';
  return `Fit ${fit.number} ${fitPredicate(fit.status)}${gate}.`;
}

/** The notebook in two sentences, made from its state. */
export function Abstract({
  notebook,
  measurement,
  fit,
}: {
  notebook: Notebook;
  measurement: Measurement;
  fit: Fit | null;
}) {
  const { cuts, bins, template, also } = notebook;
  return (
    <>
      {capital(counted(bins.kept, 'bin'))} with{' '}
      <KappaRange lo={cuts.kappaMin ?? measurement.kappaMin} hi={cuts.kappaMax ?? measurement.kappaMax} />
      {cuts.excluded?.length ? `, ${withoutBins(cuts)}` : ''}
      {also.map(({ id, name, bins: more }) => (
        <Fragment key={id}>
          , {counted(more.kept, 'bin')} of {name}
        </Fragment>
      ))}
      ; <TemplateInWords template={template} />. {fitInWords(fit)}
    </>
  );
}
