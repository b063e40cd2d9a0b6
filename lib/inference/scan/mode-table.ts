import { mcseMean } from '@/lib/sampler';
import type { ModeScan } from './modes';

/** One row of a fit's mode table. */
export interface ModeRow {
  mu: number[];
  lo: number[];
  hi: number[];
  /** Share of the draws. */
  weight: number;
  /** Its Monte Carlo standard error; 0 where every draw or none lies within. */
  mcse: number;
  /** Share by the scan; NaN where there is no value. */
  scanWeight: number;
  scanError: number;
}

/** Difference that is left alone beside the errors. */
const SLACK = 0.01;
/** Errors that a difference may come to. */
const ERRORS = 4;

/** Shares of the modes in chains: `masses`, one entry a field, holds the draws of each replica. */
export function modeTable({ modes }: ModeScan, masses: readonly (readonly Float64Array[])[]): ModeRow[] {
  return modes.map(({ lo, hi, mu, weight, error }) => {
    const inside = masses[0].map((first, replica) =>
      first.map((_, k) =>
        masses.every((chains, d) => chains[replica][k] >= lo[d] && chains[replica][k] < hi[d]) ? 1 : 0,
      ),
    );
    const draws = inside.reduce((sum, chain) => sum + chain.length, 0);
    const within = inside.reduce((sum, chain) => sum + chain.reduce((part, one) => part + one, 0), 0);
    const mcse = mcseMean(inside);
    return {
      mu,
      lo,
      hi,
      weight: draws > 0 ? within / draws : NaN,
      mcse: within === 0 || within === draws || !Number.isFinite(mcse) ? 0 : mcse,
      scanWeight: weight,
      scanError: error,
    };
  });
}

const shown = (value: number): string => value.toFixed(3);
const place = ({ lo, hi }: Pick<ModeRow, 'lo' | 'hi'>): string =>
  lo.map((from, d) => `mu${d + 1} ${from.toFixed(2)} to ${hi[d].toFixed(2)}`).join(', ');

/**
 * What speaks against the gate: modes whose share in the chains isn't the scan's, within four errors of both and 0.01, and a far
 * better fit that no jump reaches. R-hat sees neither. One sentence each, with quantity, value and remedy.
 */
export function judgeModes({ missed }: ModeScan, table: readonly ModeRow[]): string[] {
  const reasons = table.flatMap((row) => {
    const { weight, mcse, scanWeight, scanError } = row;
    if (Number.isNaN(scanWeight)) return [];
    const allowed = SLACK + ERRORS * Math.hypot(mcse, scanError);
    if (Math.abs(weight - scanWeight) <= allowed) return [];
    const never = weight === 0 ? ' no draw, ' : ` ${shown(weight)} of the draws, `;
    return [
      `The mode ${place(row)} has${never}and ${shown(scanWeight)} by the scan (they may differ by ${shown(allowed)}): let the fit run longer, or start one with another seed.`,
    ];
  });
  if (missed) {
    reasons.push(
      `The scan finds ${missed.mu.map((mu, d) => `mu${d + 1} = ${mu.toFixed(3)}`).join(', ')} better by ${missed.by.toFixed(0)} in ln than anything that the jumps reach: narrow the mass priors round it and compare.`,
    );
  }
  return reasons;
}
