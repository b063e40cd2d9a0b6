/**
 * One replica: an independent Metropolis–Hastings chain, advanced block by block.
 *
 * Schedule. One recorded draw is one sweep: each jump once, the random walk over all parameters once, then the walk over
 * each block in turn. Jumps come first because they choose the mode that the walks then explore. A fixed cycle of moves that each
 * leave the target unchanged leaves it unchanged too, it needs no random choice of the move, and every draw costs the same
 * number of evaluations. With `walkEvery` the walks sit out some sweeps, by the number of the draw, so that the schedule
 * is a function of the draw's number alone and a resumed chain takes it up where it stood.
 *
 * Warm-up is the first `settings.warmup` draws. The walks' shape is taken over windows of doubling length (50, 100, 200, … draws),
 * the last tenth adjusts only their size; with the last draw of warm-up everything is frozen.
 */
import { sortedQuantile } from './diagnostics/chain-set';
import { SamplerError } from './errors';
import { stepJump } from './moves/jump';
import { adoptShape, freeze, initRandomWalk, learnShape, stepRandomWalk } from './moves/random-walk';
import type { RandomWalkState } from './moves/random-walk';
import { createCandidate, evaluate, wrapAll } from './point';
import type { Point } from './point';
import { createRng, replicaSeed, restoreRng } from './rng';
import type { DrawBlock, JumpProposal, ReplicaState, Rng, SamplerSettings, Target } from './types';

/** Draws from the prior that a start may take before it is given up. */
const START_TRIES = 1000;

/** Draws from the prior from which the first size of the steps is taken. */
const SPREAD_DRAWS = 100;

const FIRST_WINDOW = 50;

const WALK = 'random walk';

/** A replica after a block, and the draws of that block. */
export interface Advance {
  state: ReplicaState;
  block: DrawBlock;
}

/**
 * A replica at its start: a point drawn from the prior with finite likelihood, within 1000 tries, else a SamplerError
 * ('no-start'). Its stream is that of `replicaSeed(seed, replica)`; replicas count from 0.
 */
export function startReplica(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
  seed: string,
  replica: number,
): ReplicaState {
  const moves = moveNames(target, jumps, settings);
  const rng = createRng(replicaSeed(seed, replica));
  const point = drawStart(target, rng);
  const spread = priorSpread(target, rng);
  const moveState: Record<string, RandomWalkState> = {};
  for (const [name, indices] of walksOf(target, settings)) moveState[name] = initRandomWalk(indices, spread);
  return {
    version: 1,
    replica,
    draws: 0,
    warmup: settings.warmup,
    ...point,
    rng: rng.state(),
    moves: moves.map((name) => ({ name, proposed: 0, accepted: 0 })),
    moveState,
  };
}

/**
 * Makes `draws` recorded draws from `state`, which is left as it was, and returns the new state with them. How draws are divided
 * into blocks never changes them. `shouldAbort` is asked before every draw: once it says yes, the block ends short
 * (`block.count`), and the state returned is that of its end.
 */
export function advance(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
  state: ReplicaState,
  draws: number,
  shouldAbort?: () => boolean,
): Advance {
  checkState(moveNames(target, jumps, settings), settings, state);
  if (!(Number.isInteger(draws) && draws >= 0)) {
    throw new SamplerError('wrong-settings', `A block of ${draws} draws can’t be made; give a whole number.`);
  }
  const next = structuredClone(state);
  const rng = restoreRng(next.rng);
  const candidate = createCandidate(target.names.length);
  const walks = [...walksOf(target, settings).keys()].map((name) => next.moveState[name] as RandomWalkState);
  const width = 2 + target.names.length;
  const values = new Float64Array(draws * width);
  const walkEvery = settings.walkEvery ?? 1;
  let made = 0;
  for (; made < draws && !shouldAbort?.(); made++) {
    const adapting = next.draws < next.warmup;
    let move = 0;
    for (const jump of jumps) count(next, move++, stepJump(rng, target, next, candidate, jump));
    if (adapting || next.draws % walkEvery === 0) {
      for (const walk of walks) {
        count(next, move++, stepRandomWalk(rng, target, next, candidate, walk, adapting));
      }
    }
    next.draws++;
    if (adapting) {
      adapt(walks, next, target.periods);
      if (next.draws === next.warmup) {
        walks.forEach(freeze);
        resetCounts(next);
      }
    }
    values[made * width] = next.logLikelihood;
    values[made * width + 1] = next.logPrior;
    values.set(next.x, made * width + 2);
  }
  next.rng = rng.state();
  const block = {
    replica: next.replica,
    first: state.draws,
    count: made,
    width,
    values: values.slice(0, made * width),
  };
  return { state: next, block };
}

/**
 * The replica's draws from `state` on, `blockDraws` at a time, without end: the caller stops asking when it has enough, and
 * may keep any yielded state as a checkpoint. The same as calling `advance` again and again.
 */
export function* sample(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
  state: ReplicaState,
  blockDraws: number,
): Generator<Advance, never, void> {
  if (!(Number.isInteger(blockDraws) && blockDraws > 0)) {
    throw new SamplerError('wrong-settings', `A block of ${blockDraws} draws never ends; give at least one.`);
  }
  for (let present = state; ;) {
    const step = advance(target, jumps, settings, present, blockDraws);
    present = step.state;
    yield step;
  }
}

/** Whether a window ends with the draw that brings the number of draws to `draws`; the last one ends a tenth before warm-up does. */
function endsWindow(draws: number, warmup: number): boolean {
  const end = warmup - Math.ceil(warmup / 10);
  if (draws >= end) return draws === end;
  let boundary = 0;
  for (let length = FIRST_WINDOW; boundary < draws; length *= 2) {
    boundary += length;
    // A window that would leave less than its own double before the end is the last, and runs on to it.
    if (boundary + 2 * length > end) return false;
  }
  return boundary === draws;
}

function adapt(walks: readonly RandomWalkState[], state: ReplicaState, periods: Target['periods']): void {
  const learning = state.draws <= state.warmup - Math.ceil(state.warmup / 10);
  const closing = endsWindow(state.draws, state.warmup);
  for (const walk of walks) {
    if (learning) learnShape(walk, state.x, periods);
    if (closing) adoptShape(walk);
  }
}

function count(state: ReplicaState, move: number, accepted: boolean): void {
  state.moves[move].proposed++;
  if (accepted) state.moves[move].accepted++;
}

function resetCounts(state: ReplicaState): void {
  for (const move of state.moves) {
    move.proposed = 0;
    move.accepted = 0;
  }
}

function drawStart(target: Target, rng: Rng): Point {
  const { x, logPrior, logLikelihood } = createCandidate(target.names.length);
  const point = { x, logPrior, logLikelihood };
  for (let i = 0; i < START_TRIES; i++) {
    target.drawPrior(rng, point.x);
    wrapAll(point.x, target.periods);
    if (evaluate(target, point)) return point;
  }
  throw new SamplerError(
    'no-start',
    `None of ${START_TRIES} draws from the prior has a finite likelihood: check that the priors overlap with what the data allow.`,
  );
}

/** Half the width of the central 68 % of the prior for each parameter: unlike an sd it exists for heavy tails too. */
function priorSpread(target: Target, rng: Rng): Float64Array {
  const dimension = target.names.length;
  const x = new Float64Array(dimension);
  const columns = target.names.map(() => new Float64Array(SPREAD_DRAWS));
  for (let draw = 0; draw < SPREAD_DRAWS; draw++) {
    target.drawPrior(rng, x);
    for (let i = 0; i < dimension; i++) columns[i][draw] = x[i];
  }
  return Float64Array.from(columns, (column, i) => {
    const period = target.periods[i];
    if (period !== null) return period / Math.sqrt(12);
    column.sort();
    const spread = (sortedQuantile(column, 0.84) - sortedQuantile(column, 0.16)) / 2;
    return spread > 0 && spread < Infinity ? spread : 1;
  });
}

/** The random walks by name: over all parameters, then over each block. */
function walksOf(target: Target, settings: SamplerSettings): Map<string, readonly number[]> {
  const walks = new Map<string, readonly number[]>([[WALK, target.names.map((_, i) => i)]]);
  for (const block of settings.blocks) {
    walks.set(`${WALK} of ${block.map((index) => target.names[index]).join(', ')}`, block);
  }
  return walks;
}

/** The names of all moves in the order of the sweep; a SamplerError where the settings make no sense. */
function moveNames(target: Target, jumps: readonly JumpProposal[], settings: SamplerSettings): string[] {
  const dimension = target.names.length;
  const { warmup, blocks, walkEvery = 1 } = settings;
  const refuse = (message: string) => {
    throw new SamplerError('wrong-settings', message);
  };
  if (dimension === 0) refuse('There is no parameter to sample: leave at least one prior free.');
  if (!(Number.isInteger(warmup) && warmup >= 0)) refuse(`Warm-up of ${warmup} draws: give a whole number.`);
  if (!(Number.isInteger(walkEvery) && walkEvery >= 1)) {
    refuse(`A walk every ${walkEvery} draws: give a whole number from 1.`);
  }
  if (walkEvery > 1 && jumps.length === 0)
    refuse('Without a jump the walks can’t sit out draws: set walkEvery to 1.');
  for (const block of blocks) {
    const valid = block.every((index) => Number.isInteger(index) && index >= 0 && index < dimension);
    if (block.length === 0 || !valid || new Set(block).size < block.length) {
      refuse(
        `The block [${block.join(', ')}] must list different parameters, each from 0 to ${dimension - 1}.`,
      );
    }
  }
  const names = [...jumps.map((jump) => jump.name), ...walksOf(target, settings).keys()];
  if (new Set(names).size < jumps.length + 1 + blocks.length) {
    refuse(`Two moves share a name (${names.join('; ')}): name each jump, and list each block, once.`);
  }
  return names;
}

function checkState(names: readonly string[], settings: SamplerSettings, state: ReplicaState): void {
  const held = state.moves.map((move) => move.name).join('; ');
  if (state.version === 1 && state.warmup === settings.warmup && held === names.join('; ')) return;
  throw new SamplerError(
    'wrong-state',
    `The state (version ${state.version}, warm-up ${state.warmup}, moves ${held}) is of another run than the settings ` +
      `(version 1, warm-up ${settings.warmup}, moves ${names.join('; ')}): start the replica anew.`,
  );
}
