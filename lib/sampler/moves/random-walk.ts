/**
 * Adaptive random walk over some of the parameters.
 *
 * Shape of the steps: the covariance of the chain so far, Haario, Saksman, Tamminen (2001), "An adaptive Metropolis
 * algorithm", Bernoulli 7, 223, https://doi.org/10.2307/3318737, taken over windows so that the way in from the start is forgotten.
 * Size of the steps: Robbins–Monro towards an acceptance of 0.234, or 0.44 in one dimension, Andrieu and Thoms (2008),
 * "A tutorial on adaptive MCMC", Statistics and Computing 18, 343, https://doi.org/10.1007/s11222-008-9110-y.
 * Both stop with warm-up. The steps are symmetric, wrapped coordinates included, so that the ratio is that of the densities.
 */
import { evaluate, wrap } from '../point';
import type { Candidate, Point } from '../point';
import type { RandomWalkState, Rng, Target } from '../types';
import { decide } from './accept';

/** Gain after a change of shape: the size is nearly right already, so that the first steps are not the largest. */
const GAIN_STEPS_AFTER_SHAPE = 20;

/** A walk over `indices`, at first with independent steps in proportion to `spread` (one number a parameter of the target). */
export function initRandomWalk(indices: readonly number[], spread: Float64Array): RandomWalkState {
  const d = indices.length;
  const factor = new Float64Array(d * d);
  for (let i = 0; i < d; i++) factor[i * d + i] = spread[indices[i]];
  return {
    indices: Int32Array.from(indices),
    factor,
    logScale: optimalLogScale(d),
    gainSteps: 0,
    averageLogScale: optimalLogScale(d),
    count: 0,
    moved: 0,
    origin: new Float64Array(d),
    last: new Float64Array(d),
    mean: new Float64Array(d),
    scatter: new Float64Array(d * d),
  };
}

/**
 * One step on prior × likelihood^beta, beta > 0; while `adapting` its acceptance probability also adjusts the size of the next. Tells
 * whether it was accepted.
 */
export function stepRandomWalk(
  rng: Rng,
  target: Target,
  point: Point,
  candidate: Candidate,
  state: RandomWalkState,
  adapting: boolean,
  beta = 1,
): boolean {
  const { indices, factor } = state;
  const { x, normals } = candidate;
  const d = indices.length;
  const scale = Math.exp(state.logScale);
  for (let i = 0; i < x.length; i++) x[i] = point.x[i];
  for (let i = 0; i < d; i++) {
    normals[i] = rng.normal();
    let step = 0;
    for (let j = 0; j <= i; j++) step += factor[i * d + j] * normals[j];
    const index = indices[i];
    const period = target.periods[index];
    const moved = x[index] + scale * step;
    x[index] = period === null ? moved : wrap(moved, period);
  }
  const logRatio = evaluate(target, candidate)
    ? candidate.logPrior - point.logPrior + beta * (candidate.logLikelihood - point.logLikelihood)
    : -Infinity;
  if (adapting) adjustSize(state, Math.min(1, Math.exp(logRatio)));
  return logRatio > -Infinity && decide(rng, point, candidate, logRatio);
}

/** Takes a recorded draw of warm-up into the running mean and covariance of the window. */
export function learnShape(state: RandomWalkState, x: Float64Array, periods: Target['periods']): void {
  const { indices, origin, last, mean, scatter } = state;
  const d = indices.length;
  if (state.count === 0) {
    for (let i = 0; i < d; i++) origin[i] = x[indices[i]];
    last.set(origin);
  }
  state.count++;
  let moved = false;
  for (let i = 0; i < d; i++) {
    const value = x[indices[i]];
    if (value !== last[i]) moved = true;
    last[i] = value;
  }
  if (moved) state.moved++;
  for (let i = 0; i < d; i++) {
    const before = offset(state, i, periods) - mean[i];
    mean[i] += before / state.count;
    // Welford: the deviation from the old mean in one coordinate times that from the new mean in the other.
    for (let j = 0; j <= i; j++) scatter[i * d + j] += before * (offset(state, j, periods) - mean[j]);
  }
}

function offset(state: RandomWalkState, i: number, periods: Target['periods']): number {
  const difference = state.last[i] - state.origin[i];
  const period = periods[state.indices[i]];
  return period === null ? difference : wrap(difference, period);
}

/** Ends a window: its covariance becomes the shape of the steps, unless too few draws in it differ to tell one. */
export function adoptShape(state: RandomWalkState): void {
  const d = state.indices.length;
  if (state.moved < 2 * (d + 1)) return;
  // With few moves for the dimension the correlations are mostly noise; they are damped accordingly.
  const kept = 1 - Math.min(1, (d / state.moved) ** 2);
  const covariance = state.scatter.map((value, at) => {
    const diagonal = at % (d + 1) === 0;
    return (value / (state.count - 1)) * (diagonal ? 1 : kept);
  });
  if (factorise(covariance, d)) {
    state.factor = covariance;
    state.logScale = optimalLogScale(d);
    state.averageLogScale = state.logScale;
    state.gainSteps = GAIN_STEPS_AFTER_SHAPE;
  }
  state.count = 0;
  state.moved = 0;
  state.mean.fill(0);
  state.scatter.fill(0);
}

/** Ends adaptation: the size of the steps becomes its average, which scatters less than the last value. */
export function freeze(state: RandomWalkState): void {
  state.logScale = state.averageLogScale;
}

/** ln(2.38/√d), the best multiplier for a normal target: Gelman, Roberts, Gilks (1996), Bayesian Statistics 5, 599. */
function optimalLogScale(d: number): number {
  return Math.log(2.38 / Math.sqrt(d));
}

function adjustSize(state: RandomWalkState, acceptance: number): void {
  const wanted = state.indices.length === 1 ? 0.44 : 0.234;
  state.gainSteps++;
  const gain = Math.min(1, state.gainSteps ** -0.6 / (wanted * (1 - wanted)));
  state.logScale += gain * (acceptance - wanted);
  const share = Math.min(1, 3 / state.gainSteps);
  state.averageLogScale += share * (state.logScale - state.averageLogScale);
}

/** Cholesky factor in place of a symmetric matrix given by its lower triangle; false if it isn't positive definite. */
function factorise(matrix: Float64Array, d: number): boolean {
  for (let i = 0; i < d; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * d + j];
      for (let k = 0; k < j; k++) sum -= matrix[i * d + k] * matrix[j * d + k];
      if (i !== j) {
        matrix[i * d + j] = sum / matrix[j * d + j];
      } else {
        if (!(sum > 0)) return false;
        matrix[i * d + i] = Math.sqrt(sum);
      }
    }
  }
  return true;
}
