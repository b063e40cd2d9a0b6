/**
 * One replica: an independent Metropolis–Hastings chain, advanced block by block.
 *
 * Schedule. One recorded draw is one sweep: a step of the ladder where it is due, each jump once, the random walk over all
 * parameters once, the walk over each block in turn, then differential evolution. Swaps and jumps come first because they choose the
 * mode that the others then explore. A fixed cycle of moves that each leave the target unchanged leaves it unchanged too, and it needs
 * no random choice of the move. Which draws the ladder takes part in, and which the walks sit out, is a function of the draw's number
 * and of what warm-up measured, so that a resumed chain takes it up where it stood.
 *
 * Warm-up is the first `settings.warmup` draws. The walks' shape is taken over windows of doubling length (50, 100, 200, … draws),
 * the last tenth adjusts only their size; with the last draw of warm-up everything is frozen.
 */
import { SamplerError } from './errors';
import { initDifferential } from './moves/differential';
import { initRandomWalk } from './moves/random-walk';
import { createRng, replicaSeed, restoreRng } from './rng';
import { DIFFERENTIAL, moveNames, walksOf } from './schedule';
import { drawStart, priorSpread, startLadder } from './start';
import { Sweep } from './sweep';
import type { DrawBlock, JumpProposal, ReplicaState, SamplerSettings, Target } from './types';

/** A replica after a block, and the draws of that block. */
export interface Advance {
  state: ReplicaState;
  block: DrawBlock;
  /** Milliseconds that each move took, in the order of `state.moves` (the ladder's three in one sum, under its swaps); without a clock null. */
  milliseconds: Float64Array | null;
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
  const moveState: Record<string, unknown> = {};
  for (const [name, indices] of walksOf(target, settings)) moveState[name] = initRandomWalk(indices, spread);
  if (settings.differential) moveState[DIFFERENTIAL] = initDifferential(target.names.length);
  const ladder = settings.ladder ? { ladder: startLadder(target, settings.ladder, spread, rng) } : {};
  return {
    version: 1,
    replica,
    draws: 0,
    warmup: settings.warmup,
    ...point,
    rng: rng.state(),
    moves: moves.map((name) => ({ name, proposed: 0, accepted: 0 })),
    moveState,
    ...ladder,
  };
}

/**
 * Makes `draws` recorded draws from `state`, which is left as it was, and returns the new state with them. How draws are divided
 * into blocks never changes them. `shouldAbort` is asked before every draw: once it says yes, the block ends short
 * (`block.count`), and the state returned is that of its end. `clock` (milliseconds) only times the moves; no draw depends on it.
 */
export function advance(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
  state: ReplicaState,
  draws: number,
  shouldAbort?: () => boolean,
  clock?: () => number,
): Advance {
  checkState(moveNames(target, jumps, settings), settings, state);
  if (!(Number.isInteger(draws) && draws >= 0)) {
    throw new SamplerError('wrong-settings', `A block of ${draws} draws can’t be made; give a whole number.`);
  }
  const next = structuredClone(state);
  const rng = restoreRng(next.rng);
  const sweep = new Sweep(target, jumps, settings, next, rng, clock);
  const width = 2 + target.names.length;
  const values = new Float64Array(draws * width);
  let made = 0;
  for (; made < draws && !shouldAbort?.(); made++) {
    sweep.make();
    const at = made * width;
    values[at] = next.logLikelihood;
    values[at + 1] = next.logPrior;
    for (let i = 0; i < next.x.length; i++) values[at + 2 + i] = next.x[i];
  }
  next.rng = rng.state();
  const block = {
    replica: next.replica,
    first: state.draws,
    count: made,
    width,
    values: values.slice(0, made * width),
  };
  return { state: next, block, milliseconds: sweep.milliseconds };
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

function checkState(names: readonly string[], settings: SamplerSettings, state: ReplicaState): void {
  const held = state.moves.map((move) => move.name).join('; ');
  if (state.version === 1 && state.warmup === settings.warmup && held === names.join('; ')) return;
  throw new SamplerError(
    'wrong-state',
    `The state (version ${state.version}, warm-up ${state.warmup}, moves ${held}) is of another run than the settings ` +
      `(version 1, warm-up ${settings.warmup}, moves ${names.join('; ')}): start the replica anew.`,
  );
}
