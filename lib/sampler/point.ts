/** Points of the sampled space: evaluation with its checks, and coordinates on circles. */
import { SamplerError } from './errors';
import type { Target } from './types';

/** A point with its natural-log densities. Written in place: a step allocates nothing. */
export interface Point {
  x: Float64Array;
  logPrior: number;
  logLikelihood: number;
}

/** Where a move writes what it proposes; `normals` is its scratch space, one number a parameter. */
export interface Candidate extends Point {
  normals: Float64Array;
}

/** An empty candidate for a space of `dimension` parameters. */
export function createCandidate(dimension: number): Candidate {
  return {
    x: new Float64Array(dimension),
    logPrior: -Infinity,
    logLikelihood: -Infinity,
    normals: new Float64Array(dimension),
  };
}

/** Copies `from` into `to`. */
export function copyPoint(from: Point, to: Point): void {
  // A loop: `set` takes longer for so few numbers.
  for (let i = 0; i < from.x.length; i++) to.x[i] = from.x[i];
  to.logPrior = from.logPrior;
  to.logLikelihood = from.logLikelihood;
}

/** The same place on a circle, in (−period/2, period/2]. */
export function wrap(value: number, period: number): number {
  const half = period / 2;
  if (value > -half && value <= half) return value;
  const wrapped = value - period * Math.ceil(value / period - 0.5);
  if (wrapped <= -half) return half;
  return wrapped > half ? half : wrapped;
}

/** Wraps every coordinate that lives on a circle. */
export function wrapAll(x: Float64Array, periods: Target['periods']): void {
  for (let i = 0; i < x.length; i++) {
    const period = periods[i];
    if (period !== null) x[i] = wrap(x[i], period);
  }
}

/** The parameter values as text, for messages. */
export function describe(names: readonly string[], x: Float64Array): string {
  return names.map((name, i) => `${name} = ${x[i]}`).join(', ');
}

/**
 * Fills in the densities at `point.x`; true where both are finite. Outside the prior's support the likelihood isn't
 * asked. A density that is NaN or +∞ is a SamplerError: as a plain rejection it would pass unseen and bend the result.
 */
export function evaluate(target: Target, point: Point): boolean {
  point.logPrior = checked(target, 'prior', target.logPrior(point.x), point.x);
  point.logLikelihood = -Infinity;
  if (point.logPrior === -Infinity) return false;
  point.logLikelihood = checked(target, 'likelihood', target.logLikelihood(point.x), point.x);
  return point.logLikelihood > -Infinity;
}

function checked(target: Target, term: 'prior' | 'likelihood', value: number, x: Float64Array): number {
  if (value < Infinity) return value;
  const what = Number.isNaN(value) ? 'not a number' : 'infinite';
  throw new SamplerError(
    Number.isNaN(value) ? 'not-a-number' : 'infinite-density',
    `The log ${term} is ${what} at ${describe(target.names, x)}. ` +
      `Correct the ${term} there, or narrow the priors so that this point has none.`,
  );
}
