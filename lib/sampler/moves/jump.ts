/**
 * The jump: a proposal of any kind, given from outside, accepted by the full ratio of Hastings (1970), "Monte Carlo
 * sampling methods using Markov chains and their applications", Biometrika 57, 97, https://doi.org/10.1093/biomet/57.1.97:
 *
 *     min(1, π(to) q(from | to) / [π(from) q(to | from)])
 *
 * The ratio makes any proposal right; how good it is only decides how often it is accepted. The move has no state.
 */
import { SamplerError } from '../errors';
import { describe, evaluate, wrapAll } from '../point';
import type { Candidate, Point } from '../point';
import type { JumpProposal, Rng, Target } from '../types';
import { decide } from './accept';

/** ln(prior × likelihood / proposal density) at what was proposed (−∞ where that is impossible) and at the point it was proposed from. */
export interface JumpWeights {
  proposed: number;
  present: number;
}

/**
 * One jump on prior × likelihood^beta, beta > 0; tells whether it was accepted, and in `weights`, where given, the weights of both
 * ends at beta = 1. A proposal density that is NaN, or −∞ for what was just drawn, is a SamplerError.
 */
export function stepJump(
  rng: Rng,
  target: Target,
  point: Point,
  candidate: Candidate,
  jump: JumpProposal,
  beta = 1,
  weights?: JumpWeights,
): boolean {
  jump.draw(rng, point.x, candidate.x);
  wrapAll(candidate.x, target.periods);
  const possible = evaluate(target, candidate);
  if (weights && !possible) {
    weights.proposed = -Infinity;
    weights.present = point.logPrior + point.logLikelihood - jump.logDensity(point.x, candidate.x);
  }
  if (!possible) return false;
  const there = jump.logDensity(candidate.x, point.x);
  const back = jump.logDensity(point.x, candidate.x);
  if (!(there > -Infinity && there < Infinity)) {
    const code = Number.isNaN(there) ? 'not-a-number' : 'impossible-proposal';
    throw new SamplerError(code, faultAt(jump, target, candidate.x, there));
  }
  if (!(back < Infinity)) {
    const code = Number.isNaN(back) ? 'not-a-number' : 'infinite-density';
    throw new SamplerError(code, faultAt(jump, target, point.x, back));
  }
  if (weights) {
    weights.proposed = candidate.logPrior + candidate.logLikelihood - there;
    weights.present = point.logPrior + point.logLikelihood - back;
  }
  const logRatio =
    candidate.logPrior -
    point.logPrior +
    beta * (candidate.logLikelihood - point.logLikelihood) +
    (back - there);
  return logRatio > -Infinity && decide(rng, point, candidate, logRatio);
}

function faultAt(jump: JumpProposal, target: Target, x: Float64Array, value: number): string {
  return (
    `The log density of the proposal “${jump.name}” is ${value} at ${describe(target.names, x)}. ` +
    'Its draw and its density must be of one distribution: correct the proposal.'
  );
}
