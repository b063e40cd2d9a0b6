import { createRng, type Rng } from '@/lib/sampler';
import { compileTemplate } from '@/lib/templates';

/**
 * The demo's invented survey: a deep narrow field whose squeezed triangles reach from κ = 0.002 to 0.3. Signal and
 * noise are made up here from fixed seeds; nothing in it was measured.
 */

export const accounts = ['lead', 'analyst', 'referee', 'reader'] as const;
export const demoEmail = (name: string): string => `${name}@demo.beatnote.example`;
export const siteAdministrator = demoEmail('admin');
export const groupName = 'Demo group';

const bins = 40;
const mocks = 600;
const edges = Array.from({ length: bins + 1 }, (_, i) => 0.002 * 150 ** (i / bins));

/** What was put in: two mixed fields on vertex 2, phases locked, over a smooth background. */
export const truth = { mu1: 1.9, mu2: 3.1, theta: 1.4, g: 1500, c1: -0.3, c2: 0.4 };

/** The coupling's scale hangs on the masses by powers of ten, so its prior is stated: wide enough for both. */
export const couplingPrior = { kind: 'normal', mean: 0, sd: 2000 } as const;

export const twoFieldOptions = { fields: 2, vertex: 2, phases: 'locked', background: [1, 2] };

/** Standard error of each bin, and a correlation that falls by half from one bin to the next. */
const sigma = (i: number): number => 0.002 + 0.055 * Math.sqrt(Math.sqrt(edges[i] * edges[i + 1]));
const correlation = 0.5;

/** One realisation of the noise: a first-order autoregression across the bins. */
function noise(rng: Rng): number[] {
  let last = rng.normal();
  return edges.slice(1).map((_, i) => {
    if (i > 0) last = correlation * last + Math.sqrt(1 - correlation ** 2) * rng.normal();
    return sigma(i) * last;
  });
}

const digits = (value: number): string => value.toExponential(8);

/** The measurement and its mocks as files that a person could have made. */
export function twoFieldFiles(): { points: string; mocks: string } {
  const template = compileTemplate('locked-squeezed', twoFieldOptions, {
    kind: 'bins',
    lo: Float64Array.from(edges.slice(0, -1)),
    hi: Float64Array.from(edges.slice(1)),
    weightPower: 0,
  });
  const values: Readonly<Record<string, number>> = truth;
  const signal = template.predict(template.parameters.map(({ name }) => values[name]));
  const rng = createRng('demo: the two-field measurement');
  const measured = noise(rng).map((error, i) => signal[i] + error);
  const rows = measured.map((S, i) => [edges[i], edges[i + 1], S, sigma(i)].map(digits).join(','));
  const points = [
    '# Larkfield deep field, squeezed isosceles triangles, simulated',
    'kappa_lo,kappa_hi,S,sigma_S',
    ...rows,
    '',
  ].join('\n');
  const lines = Array.from({ length: mocks }, () =>
    noise(rng)
      .map((error, i) => digits(signal[i] + error))
      .join(','),
  );
  return { points, mocks: `${lines.join('\n')}\n` };
}
