/** Which moves a replica makes, by name and in order, and when the windows of warm-up end. */
import { SamplerError } from './errors';
import type { JumpProposal, LadderSettings, SamplerSettings, Target } from './types';

const WALK = 'random walk';
/** Name of the move, and of its state. */
export const DIFFERENTIAL = 'differential evolution';
/** The ladder's own moves, which come last: swaps, and the jumps and walks of the rungs between the ends. */
export const LADDER = ['swaps', 'jumps on the ladder', 'walks on the ladder'] as const;
const FIRST_WINDOW = 50;
/** Draws of warm-up below which a ladder can't be placed. */
const SHORTEST_WARMUP = 200;

/** The random walks by name: over all parameters, then over each block. */
export function walksOf(target: Target, settings: SamplerSettings): Map<string, readonly number[]> {
  const walks = new Map<string, readonly number[]>([[WALK, target.names.map((_, i) => i)]]);
  for (const block of settings.blocks) {
    walks.set(`${WALK} of ${block.map((index) => target.names[index]).join(', ')}`, block);
  }
  return walks;
}

/** The names of all moves in the order of the sweep; a SamplerError where the settings make no sense. */
export function moveNames(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
): string[] {
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
  if (settings.ladder) checkLadder(settings.ladder, warmup, refuse);
  const names = [...jumps.map((jump) => jump.name), ...walksOf(target, settings).keys()];
  if (new Set(names).size < jumps.length + 1 + blocks.length) {
    refuse(`Two moves share a name (${names.join('; ')}): name each jump, and list each block, once.`);
  }
  if (settings.differential) names.push(DIFFERENTIAL);
  if (settings.ladder) names.push(...LADDER);
  return names;
}

function checkLadder(settings: LadderSettings, warmup: number, refuse: (message: string) => void): void {
  const { everyInWarmup, every, everyWhereJumpsDo, maxRungs, rejection } = settings;
  if (warmup < SHORTEST_WARMUP) {
    refuse(
      `A ladder after ${warmup} draws of warm-up: give at least ${SHORTEST_WARMUP}, in which it is placed.`,
    );
  }
  for (const draws of [everyInWarmup, every, everyWhereJumpsDo]) {
    if (!(Number.isInteger(draws) && draws >= 1)) {
      refuse(`A step of the ladder every ${draws} draws: give a whole number from 1.`);
    }
  }
  if (!(Number.isInteger(maxRungs) && maxRungs >= 3)) {
    refuse(`A ladder of at most ${maxRungs} rungs: give a whole number from 3.`);
  }
  if (!(rejection > 0 && rejection < 1)) {
    refuse(`A ladder whose swaps are rejected to ${rejection}: give a number between 0 and 1.`);
  }
}

/** Whether a window ends with the draw that brings the number of draws to `draws`; the last one ends a tenth before warm-up does. */
export function endsWindow(draws: number, warmup: number): boolean {
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
