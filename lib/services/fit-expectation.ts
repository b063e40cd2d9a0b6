import type { GateTarget } from '@/lib/sampler';
import { normalCdf } from '@/lib/inference/gaussian-tail';
import { blockDraws, judgedFrom, nextLook } from './fit-schedule';

/** One look, for each judged quantity: R-hat, and the smaller of bulk and tail effective size. */
export interface Seen {
  draws: number;
  rhat: readonly (number | null)[];
  ess: readonly (number | null)[];
}

/** Effective draws a draw and replica of the fits whose histories were recorded, with up to so many quantities. */
const usual = { rate: 0.5, quantities: 6 } as const;

/** Kept draws a replica that what is usual counts for beside what was seen. */
const usualWeight = judgedFrom;

/**
 * Standard deviation of the logarithm of the end about its estimate: `unseen` before anything was seen; then √ of `least`² and of
 * `ahead`² for each factor of e that the estimate lies ahead of the last look, added up.
 */
const spread = { unseen: 0.5, least: 0.05, ahead: 0.25 } as const;

/** Chance of ending at a look below which that look isn't reckoned with. */
const negligible = 0.02;

/** Where a fit should end, as far as it can be told. */
export interface End {
  /** Kept draws a replica at which every quantity should be at its target: the median of what is expected. */
  estimate: number;
  /** Kept draws a replica at the look that tells so; 0 before the first. */
  looked: number;
}

/** Effective draws that one draw of every replica makes, as is usual with so many quantities. */
const usualRate = (replicas: number, quantities: number): number =>
  usual.rate * replicas * Math.min(1, usual.quantities / Math.max(1, quantities));

/** Before anything was seen of a fit: at the rate of fits like it. */
export const unseenEnd = (replicas: number, quantities: number, target: GateTarget): End => ({
  estimate: Math.max(judgedFrom, target.ess / usualRate(replicas, quantities)),
  looked: 0,
});

/**
 * Draws at which an effective size of `wanted` is reached. With n draws it is n² / (τn + b): τ draws are worth one, and b stands for what
 * happened once, a replica that settled late or stayed away for a while, and weighs the less the longer the fit goes. b is the
 * slope of n / ess against 1 / n over the looks, weighted by n, since the error of n / ess goes as its root, with the
 * usual τ beside them; the curve goes through the last look. A straight line in n, b = 0, where nothing of the kind is seen.
 */
function drawsFor(wanted: number, sizes: readonly { n: number; ess: number }[], usualTau: number): number {
  const last = sizes[sizes.length - 1];
  let [w, x, y, xx, xy] = [usualWeight, 0, usualWeight * usualTau, 0, 0];
  for (const { n, ess } of sizes) {
    w += n;
    x += 1;
    y += (n * n) / ess;
    xx += 1 / n;
    xy += n / ess;
  }
  const slope = Math.max(0, (w * xy - x * y) / (w * xx - x * x));
  const seen = last.n / last.ess;
  const own = Math.max(seen - slope / last.n, seen / 2);
  const tau = (last.n * own + usualWeight * usualTau) / (last.n + usualWeight);
  const once = Math.max(0, (seen - tau) * last.n);
  return (wanted * tau + Math.sqrt((wanted * tau) ** 2 + 4 * wanted * once)) / 2;
}

/**
 * Where every quantity should meet the target, by what the looks saw: the slowest of them. (R-hat − 1) falls as 1/draws, with the mean
 * constant of the looks since half the draws were made. Null where a quantity hardly moves.
 */
export function seenEnd(history: readonly Seen[], target: GateTarget, replicas: number): End | null {
  const last = history.at(-1);
  if (!last || last.ess.length === 0) return null;
  const usualTau = 1 / usualRate(replicas, last.ess.length);
  const recent = history.filter(({ draws }) => draws > last.draws / 2);
  let estimate: number = judgedFrom;
  for (let k = 0; k < last.ess.length; k++) {
    const ess = last.ess[k];
    const rhat = last.rhat[k];
    if (ess === null || rhat === null || !(ess > 0)) return null;
    if (ess <= target.ess) {
      const sizes = history.flatMap((look) => {
        const size = look.ess[k];
        return size !== null && size > 0 ? [{ n: look.draws, ess: size }] : [];
      });
      estimate = Math.max(estimate, drawsFor(target.ess, sizes, usualTau));
    }
    if (rhat >= target.rhat) {
      const constants = recent.flatMap((look) => {
        const each = look.rhat[k];
        return each === null ? [] : [(each - 1) * look.draws];
      });
      const mean = constants.reduce((sum, each) => sum + each, 0) / constants.length;
      estimate = Math.max(estimate, mean / (target.rhat - 1));
    }
  }
  return { estimate, looked: last.draws };
}

/** Looks at which a fit may end that has `kept` draws and didn't end at `looked`, up to the first beyond `most`. */
function looksAhead({ looked }: End, kept: number, most: number): number[] {
  const looks: number[] = [];
  for (
    let at: number = blockDraws;
    looks.length === 0 || looks[looks.length - 1] < most;
    at = nextLook(at, blockDraws)
  )
    if (at > looked && at > kept && at >= judgedFrom) looks.push(at);
  return looks;
}

/**
 * Kept draws a replica at which the fit should end, told when it has `kept`: what is most probably within a factor of two of
 * what is left. A fit ends at a look, and looks lie far apart, so close to the end that is between those which it may be. The
 * end is taken for lognormal about its estimate, and beyond the last look, at which it wasn't.
 */
export function toldEnd(end: End, kept: number): number {
  const { estimate, looked } = end;
  const ahead = Math.max(0, Math.log(estimate / looked));
  const sd = looked > 0 ? Math.hypot(spread.least, spread.ahead * Math.sqrt(ahead)) : spread.unseen;
  const by = (draws: number): number => normalCdf(Math.log(draws / estimate) / sd);
  const looks = looksAhead(end, kept, estimate * Math.exp(4 * sd));
  const passed = looked >= judgedFrom ? by(looked) : 0;
  const shares = looks.map((look, i) => (by(look) - (i > 0 ? by(looks[i - 1]) : passed)) / (1 - passed));
  let best = { share: 0, from: looks[0], to: looks[0] };
  looks.forEach((from, i) => {
    let [share, to] = [0, from];
    for (let j = i; j < looks.length && looks[j] - kept <= 4 * (from - kept); j++) {
      share += shares[j];
      if (shares[j] > negligible) to = looks[j];
    }
    if (share > best.share) best = { share, from, to };
  });
  return kept + Math.sqrt((best.from - kept) * (best.to - kept));
}
