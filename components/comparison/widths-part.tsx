import { figureNumber } from '@/components/notebook/sections';
import { capital } from '@/components/words/counts';
import type { Comparison } from '@/lib/schemas';
import { fieldsInWords } from './comparison-words';
import { WidthFigure, type WidthLine } from './width-figure';

type Width = Comparison['widths'][number];

const methods: Record<Width['curve']['method'], string> = {
  exact:
    'is integrated exactly: amplitudes and background in closed form, the mass by quadrature, so that only the error of the fit’s own ln Z remains',
  reweighted:
    'comes from the fit’s own draws, weighted by the ratio of the priors, with the error of that beside the fit’s own',
};

/** Runs of widths that have no value for the same reason: "no value from 0.1 to 0.3, because …" */
function gapsOf({ curve }: Width): { lo: number; hi: number; because: string }[] {
  const gaps: { lo: number; hi: number; because: string; at: number }[] = [];
  curve.points.forEach(({ factor, because }, at) => {
    if (because === null) return;
    const last = gaps.at(-1);
    if (last && last.at === at - 1 && last.because === because) Object.assign(last, { hi: factor, at });
    else gaps.push({ lo: factor, hi: factor, because, at });
  });
  return gaps;
}

const shown = (sd: number): string => String(Number(sd.toPrecision(2)));

/** How the Bayes factors move with the width of the amplitudes' prior. */
export function WidthsPart({ comparison }: { comparison: Comparison }) {
  const { widths, counts } = comparison;
  if (!widths.length) return null;
  const none = counts.find(({ fields }) => fields === 0);
  const toNone = widths.every(({ fields }) => counts.find((count) => count.fields === fields)?.lnBayesNone);
  const against = none && toNone ? 'no field' : 'itself at the width set';
  const lines = widths.map((width): WidthLine => {
    const own = toNone ? (counts.find(({ fields }) => fields === width.fields)?.lnBayesNone ?? null) : null;
    return {
      label: fieldsInWords(width.fields),
      fields: width.fields,
      sd: width.curve.sd,
      points: width.curve.points.map(({ factor, difference, error }) => ({
        sd: factor * width.curve.sd,
        value: difference === null ? NaN : difference + (own?.value ?? 0),
        error: error === null ? NaN : Math.hypot(error, own?.error ?? 0),
      })),
    };
  });
  const of = widths[0].curve.parameters.includes('g') ? 'g' : 'the amplitudes';
  return (
    <>
      <WidthFigure number={figureNumber('prior-widths')} lines={lines} of={of} against={against} />
      <ul className="mt-1 list-none p-0 text-small text-ink-2">
        {widths.map((width) => (
          <li key={width.fit}>
            {capital(fieldsInWords(width.fields))} (fit {width.number}): the curve{' '}
            {methods[width.curve.method]}.
            {gapsOf(width).map(({ lo, hi, because }) => (
              <span key={lo}>
                {' '}
                No value{' '}
                {lo === hi
                  ? `at ${shown(lo * width.curve.sd)}`
                  : `from ${shown(lo * width.curve.sd)} to ${shown(hi * width.curve.sd)}`}
                , because {because}.
              </span>
            ))}
          </li>
        ))}
      </ul>
    </>
  );
}
