import { buildInference, type Inference, type InferenceSpec } from '@/lib/inference';
import { buildNoise, type CalibrationProblem } from '@/lib/inference/calibration';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { compileTemplate, exactShapeTotal, type Axis, type Prior } from '@/lib/templates';
import { firstCoefficient, lightShape, meanPower, oscillation } from './calibration-formulas';

/** A template with priors, and its prediction for one bin by other code. */
export interface Case {
  name: string;
  id: string;
  options: Record<string, unknown>;
  priors: Record<string, Prior>;
  bins: number;
  noise: number;
  predict(x: Readonly<Record<string, number>>, lo: number, hi: number): number;
}

const normal = (sd: number): Prior => ({ kind: 'normal', mean: 0, sd });
const uniform = (lo: number, hi: number): Prior => ({ kind: 'uniform', lo, hi });
const power = (p: number, lo: number, hi: number): number => meanPower([p, 0], lo, hi)[0];
const smooth: Case['predict'] = (x, lo, hi) => x.c1 * power(1, lo, hi) + x.c2 * power(2, lo, hi);
const background = { c1: normal(1), c2: normal(3) };

/** Eight-point Gauss nodes on (−1, 1), to ten digits (Abramowitz and Stegun, table 25.4): half of the symmetric pairs. */
const NODES = [
  [0.1834346425, 0.3626837834],
  [0.5255324099, 0.3137066459],
  [0.7966664774, 0.222381034],
  [0.9602898565, 0.1012285363],
] as const;

/** Mean over ln κ of a bin. */
function binMean(shape: (kappa: number) => number, lo: number, hi: number): number {
  const middle = Math.log(lo * hi) / 2;
  const half = Math.log(hi / lo) / 2;
  return NODES.reduce(
    (sum, [at, weight]) =>
      sum + (weight / 2) * (shape(Math.exp(middle - half * at)) + shape(Math.exp(middle + half * at))),
    0,
  );
}

const free =
  (fields: number): Case['predict'] =>
  (x, lo, hi) => {
    let sum = smooth(x, lo, hi);
    for (let n = 1; n <= fields; n += 1) {
      // a cos + b sin of μ ln κ is Re[(a − i b) κ^{iμ}].
      sum += oscillation([x[`a${n}`], -x[`b${n}`]], x[`mu${n}`], lo, hi);
    }
    return sum;
  };

export const cases: readonly Case[] = [
  {
    name: 'background',
    id: 'background',
    options: { background: [1, 2] },
    priors: background,
    bins: 16,
    noise: 0.02,
    predict: smooth,
  },
  {
    name: 'free-phase-one',
    id: 'free-phase',
    options: { fields: 1, background: [1, 2] },
    priors: { mu1: uniform(0.5, 6), a1: normal(1), b1: normal(1), ...background },
    bins: 24,
    noise: 0.05,
    predict: free(1),
  },
  {
    name: 'free-phase-two',
    id: 'free-phase',
    options: { fields: 2, background: [1, 2] },
    priors: {
      mu1: uniform(0.5, 6),
      mu2: uniform(0.5, 6),
      a1: normal(1),
      b1: normal(1),
      a2: normal(1),
      b2: normal(1),
      ...background,
    },
    bins: 24,
    noise: 0.05,
    predict: free(2),
  },
  {
    name: 'locked-squeezed-two',
    id: 'locked-squeezed',
    options: { fields: 2, vertex: 1, background: [1, 2] },
    priors: {
      mu1: uniform(0.5, 3),
      mu2: uniform(0.5, 3),
      theta: { kind: 'isotropic' },
      g: normal(30),
      ...background,
    },
    bins: 24,
    noise: 0.03,
    predict: (x, lo, hi) =>
      smooth(x, lo, hi) +
      x.g *
        (Math.cos(x.theta) ** 2 * oscillation(firstCoefficient(x.mu1), x.mu1, lo, hi) +
          Math.sin(x.theta) ** 2 * oscillation(firstCoefficient(x.mu2), x.mu2, lo, hi)),
  },
  {
    // The exact shape itself is the program's; only its averages over bins and the sum are other code here.
    name: 'locked-exact-one',
    id: 'locked-exact',
    options: { fields: 1, vertex: 1, background: [] },
    priors: { mu1: uniform(0.5, 3), g: normal(30) },
    bins: 24,
    noise: 0.03,
    predict: (x, lo, hi) => x.g * binMean((kappa) => exactShapeTotal(x.mu1, kappa, 1), lo, hi),
  },
  {
    name: 'light-one',
    id: 'light',
    options: { fields: 1, vertex: 1, background: [1, 2] },
    priors: { nu1: uniform(0.05, 0.7), g: normal(5), ...background },
    bins: 24,
    noise: 0.03,
    predict: (x, lo, hi) => smooth(x, lo, hi) + x.g * lightShape(x.nu1, lo, hi),
  },
];

/** A fault planted in what fits the data. */
export type Fault = 'phase' | 'ignored' | 'covariance';

/** Bins from 0.01 to 0.3, equal in ln κ. */
function axisOf(bins: number): Axis & { kind: 'bins' } {
  const edge = (i: number): number => 0.01 * 30 ** (i / bins);
  return {
    kind: 'bins',
    lo: Float64Array.from({ length: bins }, (_, i) => edge(i)),
    hi: Float64Array.from({ length: bins }, (_, i) => edge(i + 1)),
    weightPower: 0,
  };
}

/** Neighbouring bins correlated by 0.3, so that the covariance matters. */
function covarianceOf(bins: number, sd: number): Float64Array {
  return Float64Array.from({ length: bins * bins }, (_, k) => {
    const apart = Math.abs(Math.floor(k / bins) - (k % bins));
    return sd * sd * 0.3 ** apart;
  });
}

export function problemOf(
  { id, options, priors, bins, noise, predict }: Case,
  fault?: Fault,
): CalibrationProblem {
  const axis = axisOf(bins);
  const template = compileTemplate(id, options, axis);
  const covariance = covarianceOf(bins, noise);
  const given = fault === 'covariance' ? covariance.map((value) => 0.8 * value) : covariance;
  const scatter = buildNoise('normal', { covariance, mockCount: null }, template.parameters.length);
  const spec = (S: Float64Array): InferenceSpec => ({
    data: { S, covariance: given, mockCount: null },
    likelihood: 'normal',
    template,
    priors,
  });
  const prior = buildInference(spec(new Float64Array(bins)));
  const names = prior.sampled.map(({ name }) => name);
  const own = new Map<Float64Array, Inference>();
  const inferenceOf = (data: Float64Array): Inference => {
    const made = own.get(data) ?? buildInference(spec(data));
    own.clear();
    own.set(data, made);
    return made;
  };
  return {
    ...(fault === 'ignored'
      ? { logLikelihood: (data: Float64Array, x: Float64Array) => -inferenceOf(data).chiSquare(x) / 2 }
      : {}),
    draw(rng) {
      const truth = new Float64Array(names.length);
      prior.target.drawPrior(rng, truth);
      const named = Object.fromEntries(names.map((name, i) => [name, truth[i]]));
      if (fault === 'phase') {
        const { a1, b1 } = named;
        named.a1 = a1 * Math.cos(0.5) + b1 * Math.sin(0.5);
        named.b1 = b1 * Math.cos(0.5) - a1 * Math.sin(0.5);
      }
      const noiseOf = scatter(rng);
      const data = noiseOf.map((value, i) => value + predict(named, axis.lo[i], axis.hi[i]));
      return { truth, data };
    },
    fit(data) {
      const made = inferenceOf(data);
      if (fault !== 'ignored') return made;
      return { ...made, target: { ...made.target, logLikelihood: () => 0 }, jumps: [] };
    },
    settings: (blocks) => ({
      ...samplerSettings({ warmup: 200, sampler: samplerOfNewFits }, blocks),
      // Without jumps, as where the likelihood is ignored, walks are made on every draw.
      ...(fault === 'ignored' ? { walkEvery: 1 } : {}),
    }),
  };
}
