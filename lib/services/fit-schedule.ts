/**
 * When blocks end, which draws are kept, and at which draws convergence is judged. All of it is a function of counts
 * of draws alone, never of `maxDraws`, a clock or the number of workers: a fit that was interrupted, stopped, resumed or
 * extended makes the same draws and the same decisions as one that ran through.
 */

/** Recorded draws of warm-up of every fit. */
export const warmupDraws = 1_500;

/** Recorded draws of a block: what one turn of a replica makes. */
export const blockDraws = 500;

/** Most kept draws a replica that are stored; beyond, they are thinned. */
export const storedLimit = 50_000;

/** Kept draws a replica before which convergence isn't judged. */
export const judgedFrom = 1_000;

/** Smallest power of two that brings `kept` draws down to at most `limit` stored ones: draw k stays if k % stride = 0. */
export function strideOf(kept: number, limit: number = storedLimit): number {
  let stride = 1;
  while (Math.ceil(kept / stride) > limit) stride *= 2;
  return stride;
}

/** Stored draws a replica when `kept` have been made. */
export const storedOf = (kept: number): number => Math.ceil(kept / strideOf(kept));

/** The counts that fix a fit's course: recorded draws are counted from the start of warm-up. */
export interface Course {
  warmup: number;
  blockDraws: number;
}

/**
 * Where the block that starts at recorded draw `from` ends: at the next multiple of the block, at the end of warm-up, or at
 * `limit` (recorded draws), whichever comes first. Blocks stay on one grid, so that a budget that cuts one short
 * shifts no later one.
 */
export function blockEnd(from: number, limit: number, { warmup, blockDraws: block }: Course): number {
  const base = from < warmup ? 0 : warmup;
  const next = base + (Math.floor((from - base) / block) + 1) * block;
  return Math.min(next, from < warmup ? warmup : Infinity, limit);
}

/**
 * Whether the fit is looked at when `kept` draws a replica are there: at every block end up to eight blocks, then an eighth
 * further each time (rounded up to a block), so that all looks together cost a few times the last one.
 */
export function isLook(kept: number, block: number): boolean {
  if (kept <= 0 || kept % block !== 0) return false;
  let at = block;
  while (at < kept) at = nextLook(at, block);
  return at === kept;
}

/** The look after the one at `look`. */
export const nextLook = (look: number, block: number): number =>
  look + block * Math.max(1, Math.ceil(look / block / 8));
