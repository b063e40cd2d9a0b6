import { buildInference, type InferenceSpec } from '@/lib/inference';
import type { Prior } from '@/lib/templates';

/**
 * ln ∫ exp f over a box that holds all of it, by the trapezoidal rule in every direction: f is smooth and falls to nothing at
 * the ends (or is periodic), so that the sum converges geometrically.
 */
export function bruteForce(
  f: (x: Float64Array) => number,
  axes: readonly { lo: number; hi: number; n: number }[],
): number {
  const x = new Float64Array(axes.length);
  const values: number[] = [];
  const walk = (d: number): void => {
    if (d === axes.length) {
      values.push(f(x));
      return;
    }
    const { lo, hi, n } = axes[d];
    for (let k = 0; k < n; k += 1) {
      x[d] = lo + ((hi - lo) * (k + 0.5)) / n;
      walk(d + 1);
    }
  };
  walk(0);
  let largest = -Infinity;
  for (const value of values) if (value > largest) largest = value;
  let sum = 0;
  for (const value of values) sum += Math.exp(value - largest);
  return largest + Math.log(sum) + axes.reduce((total, { lo, hi, n }) => total + Math.log((hi - lo) / n), 0);
}

/** ln L × prior of everything but the masses, at these masses, as the sampler's own target has it. */
export function posterior(
  spec: InferenceSpec,
  masses: readonly number[],
): { f: (x: Float64Array) => number; names: string[] } {
  const fixed: Record<string, Prior> = { ...spec.priors };
  masses.forEach((value, i) => (fixed[`mu${i + 1}`] = { kind: 'fixed', value }));
  const { target } = buildInference({ ...spec, priors: fixed });
  return {
    f: (x) => {
      const prior = target.logPrior(x);
      return prior > -Infinity ? prior + target.logLikelihood(x) : -Infinity;
    },
    names: [...target.names],
  };
}
