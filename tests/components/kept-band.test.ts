import { describe, expect, it } from 'vitest';
import { keptBand } from '@/components/notebook/kept-band';
import { priorPredictive } from '@/lib/inference/prior-predictive';
import { compileTemplate, type Prior } from '@/lib/templates';

const kappa = Float64Array.of(0.1, 1);
const on = (powers: number[], at = kappa) => {
  const fine = compileTemplate(
    'background',
    { background: powers, binAverage: false },
    { kind: 'points', kappa: at },
  );
  return { fine, kappa: at, seen: { template: fine, kappa: at } };
};
const priors = (sd: number): Record<string, Prior> => ({ c1: { kind: 'normal', mean: 0, sd } });

describe('a band that is kept', () => {
  it('is the one that would be made', () => {
    const made = priorPredictive(on([1]).fine, priors(2), 50);
    expect(keptBand(on([1]), priors(2), 50)).toEqual(made);
    expect(keptBand(on([1]), priors(2), 50)).toEqual(made);
  });

  it('is made once for a template compiled anew with equal priors', () => {
    expect(keptBand(on([1]), priors(2), 50)).toBe(keptBand(on([1]), priors(2), 50));
  });

  it('is made anew where a measurement’s window or columns stand between', () => {
    const plain = on([1]);
    const through = { ...plain, seen: on([1], Float64Array.of(0.2, 0.4)) };
    const seen = { template: through.seen.fine, kappa: through.seen.kappa };
    const band = keptBand({ ...plain, seen }, priors(2), 50);
    expect(band).toEqual(priorPredictive(seen.template, priors(2), 50));
    expect(band).not.toEqual(keptBand(plain, priors(2), 50));
  });

  it('is another for other priors, another template, another range and other draws', () => {
    const band = keptBand(on([1]), priors(2), 50);
    expect(keptBand(on([1]), priors(3), 50)).not.toEqual(band);
    expect(keptBand(on([2]), { c2: priors(2).c1 }, 50)).not.toEqual(band);
    expect(keptBand(on([1], Float64Array.of(0.1, 2)), priors(2), 50)).not.toEqual(band);
    expect(keptBand(on([1]), priors(2), 60)).not.toEqual(band);
  });

  it('goes when 64 others were wanted since', () => {
    const band = keptBand(on([1]), priors(2), 50);
    for (let i = 0; i < 64; i += 1) keptBand(on([1]), priors(10 + i), 5);
    const again = keptBand(on([1]), priors(2), 50);
    expect(again).not.toBe(band);
    expect(again).toEqual(band);
  });
});
