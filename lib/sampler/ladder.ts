/**
 * A ladder of temperatures beside one chain: rungs with densities prior × likelihood^β, β from 0 to 1, which exchange points with their
 * neighbours. The last rung is the chain itself; rung 0 is drawn from the prior anew at every step.
 *
 * Swaps are even–odd in turn, which is non-reversible, and the β are placed so that all pairs reject equally, by the cumulative
 * barrier Λ(β): Syed, Bouchard-Côté, Deligiannidis, Doucet (2022), "Non-reversible parallel tempering", JRSS B 84, 321,
 * https://doi.org/10.1111/rssb.12464. Placing stops before the last window of warm-up, in which the rungs' walks take their shape.
 */
import { addEntry, emptySums } from './log-sums';
import { stepJump } from './moves/jump';
import { adoptShape, freeze, initRandomWalk, learnShape, stepRandomWalk } from './moves/random-walk';
import { copyPoint, evaluate, wrapAll } from './point';
import type { Candidate, Point } from './point';
import type { JumpProposal, LadderSettings, LadderState, Rng, RungPoint, Target } from './types';

/** Rungs of the first ladder, both ends counted, unless fewer are allowed. */
const FIRST_RUNGS = 12;
/** A pair that rejects more than this tells little of where between its ends the barrier lies. */
const STEEP = 0.7;

/** What a walker has seen: nothing, the posterior's end, the prior's end, the prior's end after the posterior's. */
const FRESH = 0;
const FROM_TOP = 1;
const FROM_BOTTOM = 2;
const RETURNING = 3;

/** What was done in one step of the ladder. */
export interface LadderCounts {
  jumps: { proposed: number; accepted: number };
  walks: { proposed: number; accepted: number };
  swaps: { proposed: number; accepted: number };
}

/** No step yet. */
export function emptyCounts(): LadderCounts {
  const none = () => ({ proposed: 0, accepted: 0 });
  return { jumps: none(), walks: none(), swaps: none() };
}

/**
 * A ladder at its start: β in a geometric row from 1/|range of ln likelihood under the prior| to 1. `starts` are points of the
 * prior with finite likelihood, as many as there are rungs below the chain (`rungsAtFirst` − 1).
 */
export function initLadder(
  settings: LadderSettings,
  starts: readonly Point[],
  spread: Float64Array,
  range: number,
): LadderState {
  const rungs = starts.length + 1;
  const lowest = 1 / Math.max(2, range);
  const betas = Float64Array.from({ length: rungs }, (_, k) =>
    k === 0 ? 0 : lowest ** ((rungs - 1 - k) / Math.max(1, rungs - 2)),
  );
  const indices = Array.from(spread, (_, i) => i);
  return {
    betas,
    points: starts.map(({ x, logPrior, logLikelihood }) => ({ x: x.slice(), logPrior, logLikelihood })),
    walks: Array.from({ length: rungs - 2 }, () => initRandomWalk(indices, spread)),
    steps: 0,
    rejections: new Float64Array(rungs - 1),
    tries: new Float64Array(rungs - 1),
    walkers: new Uint8Array(rungs),
    roundTrips: 0,
    every: settings.everyInWarmup,
    stones: null,
  };
}

/** Rungs of the first ladder, both ends counted. */
export function rungsAtFirst({ maxRungs }: LadderSettings): number {
  return Math.min(FIRST_RUNGS, maxRungs);
}

/**
 * One step: the prior's rung is drawn anew, every rung between jumps and walks, then neighbours swap; `chain`, the last rung, only
 * swaps. After warm-up the stones' sums take the state between moves and swaps.
 */
export function stepLadder(
  rng: Rng,
  target: Target,
  jumps: readonly JumpProposal[],
  state: LadderState,
  chain: Point,
  candidate: Candidate,
  adapting: boolean,
): LadderCounts {
  const { betas, points, walks } = state;
  const counts = emptyCounts();
  drawBottom(rng, target, points[0]);
  for (let k = 1; k < points.length; k++) {
    for (const jump of jumps) note(counts.jumps, stepJump(rng, target, points[k], candidate, jump, betas[k]));
    const walk = walks[k - 1];
    note(counts.walks, stepRandomWalk(rng, target, points[k], candidate, walk, adapting, betas[k]));
  }
  if (state.stones) addEntry(state.stones, stoneLogs(state, target, chain));
  swapAll(rng, state, chain, counts);
  return counts;
}

function note(count: { proposed: number; accepted: number }, accepted: boolean): void {
  count.proposed++;
  if (accepted) count.accepted++;
}

function drawBottom(rng: Rng, target: Target, point: RungPoint): void {
  target.drawPrior(rng, point.x);
  wrapAll(point.x, target.periods);
  evaluate(target, point);
}

/** √ of the likelihood ratio of each pair, from below and from above; then the likelihood that evidences are of, over the chain's. */
function stoneLogs({ betas, points }: LadderState, target: Target, chain: Point): number[] {
  const logs: number[] = [];
  for (let k = 0; k < points.length; k++) {
    const half = (betas[k + 1] - betas[k]) / 2;
    const above = k + 1 < points.length ? points[k + 1] : chain;
    logs.push(half * points[k].logLikelihood, -half * above.logLikelihood);
  }
  if (target.evidence) logs.push(lastStone(target.evidence, chain.logLikelihood));
  return logs;
}

/** ln of the likelihood that evidences are of over the one that is sampled. */
export function lastStone(
  { exponent, offset }: NonNullable<Target['evidence']>,
  logLikelihood: number,
): number {
  return (exponent - 1) * logLikelihood + offset;
}

function swapAll(rng: Rng, state: LadderState, chain: Point, counts: LadderCounts): void {
  const { betas, points, walkers } = state;
  const top = points.length;
  for (let k = state.steps % 2; k < top; k += 2) {
    const above = k + 1 < top ? points[k + 1] : chain;
    const logRatio = (betas[k + 1] - betas[k]) * (points[k].logLikelihood - above.logLikelihood);
    state.rejections[k] += logRatio < 0 ? -Math.expm1(logRatio) : 0;
    state.tries[k]++;
    counts.swaps.proposed++;
    if (logRatio < 0 && Math.log(rng.uniform()) >= logRatio) continue;
    counts.swaps.accepted++;
    if (k + 1 < top) [points[k], points[k + 1]] = [points[k + 1], points[k]];
    else {
      const lower = { ...points[k], x: points[k].x.slice() };
      copyPoint(chain, points[k]);
      copyPoint(lower, chain);
    }
    [walkers[k], walkers[k + 1]] = [walkers[k + 1], walkers[k]];
  }
  state.steps++;
  if (walkers[top] === RETURNING) state.roundTrips++;
  walkers[top] = FROM_TOP;
  if (walkers[0] === FROM_TOP) walkers[0] = RETURNING;
  else if (walkers[0] === FRESH) walkers[0] = FROM_BOTTOM;
}

/** Takes the rungs' points into the shapes of their walks. */
export function learnLadder(state: LadderState, periods: Target['periods']): void {
  state.walks.forEach((walk, i) => learnShape(walk, state.points[i + 1].x, periods));
}

/** Mean rejection of the swaps of each pair; NaN where none was tried. */
export function rejectionRates({ rejections, tries }: LadderState): Float64Array {
  return rejections.map((sum, k) => sum / tries[k]);
}

/**
 * Ends a window of warm-up: the walks take their shapes, and while `placing` the β move to where all pairs reject equally, with as many
 * rungs as the barrier asks for. A new rung takes point and walk of the old one next to it.
 */
export function endLadderWindow(state: LadderState, settings: LadderSettings, placing: boolean): void {
  state.walks.forEach(adoptShape);
  if (!placing || state.tries.some((tries) => tries === 0)) return;
  const betas = placeRungs(state.betas, rejectionRates(state), settings);
  const near = Array.from(betas.subarray(0, -1), (beta) => nearest(state.betas, beta));
  const points = near.map((k) => ({ ...state.points[k], x: state.points[k].x.slice() }));
  const walks = near.slice(1).map((k) => structuredClone(state.walks[Math.max(0, k - 1)]));
  Object.assign(state, { betas, points, walks });
  resetLadder(state);
}

function resetLadder(state: LadderState): void {
  const rungs = state.betas.length;
  state.steps = 0;
  state.rejections = new Float64Array(rungs - 1);
  state.tries = new Float64Array(rungs - 1);
  state.walkers = new Uint8Array(rungs);
  state.roundTrips = 0;
}

/** The rung between the ends whose β is nearest in proportion; 0 for 0. */
function nearest(betas: Float64Array, beta: number): number {
  if (beta === 0) return 0;
  let best = 1;
  for (let k = 2; k + 1 < betas.length; k++) {
    if (Math.abs(Math.log(betas[k] / beta)) < Math.abs(Math.log(betas[best] / beta))) best = k;
  }
  return best;
}

/**
 * β at equal steps of the cumulative barrier Λ = Σ rejections, interpolated between the old ones; the number of rungs is the least, up to
 * `maxRungs`, at which a pair rejects no more than `rejection`. Exported for its test.
 */
export function placeRungs(
  betas: Float64Array,
  rates: Float64Array,
  { maxRungs, rejection }: LadderSettings,
): Float64Array {
  // A pair that rejected nothing still has a way to go, or its ends would coincide.
  const steps = rates.map((rate) => Math.max(rate, 1e-3));
  const barrier = steps.reduce((sum, rate) => sum + rate, 0);
  const pairs = Math.min(maxRungs - 1, Math.max(2, Math.ceil(barrier / rejection)));
  const placed = new Float64Array(pairs + 1);
  let k = 0;
  let below = 0;
  for (let j = 1; j < pairs; j++) {
    const wanted = (barrier * j) / pairs;
    while (below + steps[k] < wanted) below += steps[k++];
    const part = (wanted - below) / steps[k];
    if (k > 0) placed[j] = betas[k] * (betas[k + 1] / betas[k]) ** part;
    else placed[j] = betas[1] * (steps[0] > STEEP ? part ** 3 : part);
  }
  placed[pairs] = 1;
  return placed;
}

/**
 * Ends adaptation: sizes of the walks are frozen, counts begin anew, and so do the stones' sums unless the ladder `rests`, because
 * something else gives the evidence.
 */
export function freezeLadder(state: LadderState, target: Target, every: number, rests: boolean): void {
  state.walks.forEach(freeze);
  resetLadder(state);
  state.every = every;
  state.stones = rests ? null : emptySums(2 * (state.betas.length - 1) + (target.evidence ? 1 : 0));
}

/** The barrier Λ of Syed et al. as the swaps since the end of warm-up give it: the sum of the pairs' mean rejections. */
export function barrierOf(state: LadderState): number {
  return rejectionRates(state).reduce((sum, rate) => sum + rate, 0);
}
