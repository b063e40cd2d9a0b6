import type { GateTarget } from '@/lib/sampler';
import { blockDraws, isLook, judgedFrom } from './fit-schedule';

/** One look, for each judged quantity: R-hat, and the smaller of bulk and tail effective size. */
export interface Seen {
  draws: number;
  rhat: readonly (number | null)[];
  ess: readonly (number | null)[];
}

/** Effective draws a draw and replica of the fits whose histories were recorded, with up to so many quantities. */
const usual = { rate: 0.5, quantities: 6 } as const;

/** Steepest growth of an effective size as a power of the draws that is taken to go on. */
const steepest = 1.5;

/** The first look at `kept` draws a replica or beyond. */
export function lookFrom(kept: number): number {
  let at = Math.max(blockDraws, Math.ceil(kept / blockDraws) * blockDraws);
  while (!isLook(at, blockDraws)) at += blockDraws;
  return at;
}

/** Kept draws a replica at which the gate may be met, before anything was seen of the fit: at the rate of fits like it. */
export function unseenEnd(replicas: number, quantities: number, target: GateTarget): number {
  const rate = usual.rate * replicas * Math.min(1, usual.quantities / Math.max(1, quantities));
  return lookFrom(Math.max(judgedFrom, target.ess / rate));
}

/** Kept draws at which every quantity is at its target; null where one hardly moves. */
function endSeen(history: readonly Seen[], target: GateTarget): number | null {
  const last = history.at(-1);
  if (!last || last.ess.length === 0) return null;
  const half = history.findLast(({ draws }) => draws <= last.draws / 2);
  let wanted: number = judgedFrom;
  for (let k = 0; k < last.ess.length; k++) {
    const ess = last.ess[k];
    const rhat = last.rhat[k];
    if (ess === null || rhat === null || !(ess > 0)) return null;
    const before = half?.ess[k] ?? null;
    const power = half && before ? Math.log(ess / before) / Math.log(last.draws / half.draws) : 1;
    const growth = Math.min(steepest, Math.max(1, power));
    if (ess <= target.ess) wanted = Math.max(wanted, last.draws * (target.ess / ess) ** (1 / growth));
    wanted = Math.max(wanted, (last.draws * (rhat - 1)) / (target.rhat - 1));
  }
  return wanted;
}

/**
 * Kept draws a replica at which every quantity should meet the target: a look, and one that is still to come unless `met`.
 * An effective size grows as the power of the draws that it grew with since half of them were made, at least linearly, since one
 * that was small while replicas settled is made good later; (R-hat − 1) falls as 1/draws on average. Null where nothing can be told.
 */
export function expectedEnd(history: readonly Seen[], target: GateTarget, met: boolean): number | null {
  const last = history.at(-1);
  if (!last) return null;
  if (met) return last.draws;
  const end = endSeen(history, target);
  return end === null ? null : lookFrom(Math.max(end, last.draws + 1));
}
