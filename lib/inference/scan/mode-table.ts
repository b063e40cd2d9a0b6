import { mcseMean } from '@/lib/sampler';
import { MOST_ERROR, type ModeScan } from './modes';

/** One row of a fit's mode table. */
export interface ModeRow {
  mu: number[];
  lo: number[];
  hi: number[];
  /** Share of the draws. */
  weight: number;
  /** Its Monte Carlo standard error; 0 where every draw or none lies within. */
  mcse: number;
  /** Share by the scan or the independent run; NaN where there is no value. */
  scanWeight: number;
  scanError: number;
}

/** Difference that is left alone beside the errors. */
const SLACK = 0.01;
/**
 * Errors that a difference may come to. An independent run's have 15 degrees of freedom: Student's t passes 5.5 as rarely as a normal
 * variable passes 4 (6e-5).
 */
const ERRORS = { chains: 4, scan: 4, run: 5.5 };
const SOURCES = { scan: 'scan', run: 'independent run' };
/** An independent run that is worth fewer draws can't speak. */
const LEAST_EFFECTIVE = 30;

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
      scanWeight: error <= MOST_ERROR ? weight : NaN,
      scanError: error,
    };
  });
}

const shown = (value: number): string => value.toFixed(3);
const place = (names: readonly string[], { lo, hi }: Pick<ModeRow, 'lo' | 'hi'>): string =>
  names.map((name, d) => `${name} ${lo[d].toFixed(2)} to ${hi[d].toFixed(2)}`).join(', ');

/**
 * What speaks against the gate: modes whose share in the chains isn't that of the scan or of the independent run, within the errors of
 * both and 0.01; an independent run that can't speak yet; and a far better fit that no jump reaches. R-hat sees none of them.
 * One sentence each, with quantity, value and remedy.
 */
export function judgeModes(
  { by, names, modes, missed, effective = Infinity }: ModeScan,
  table: readonly ModeRow[],
): string[] {
  const reasons = table.flatMap((row, k) => {
    const { weight, mcse, scanError } = row;
    const other = modes[k].weight;
    if (Number.isNaN(other)) return [];
    const allowed = SLACK + Math.hypot(ERRORS.chains * mcse, ERRORS[by] * scanError);
    if (Math.abs(weight - other) > allowed) {
      const never = weight === 0 ? ' no draw, ' : ` ${shown(weight)} of the draws, `;
      return [
        `The mode ${place(names, row)} has${never}and ${shown(other)} by the ${SOURCES[by]} (they may differ by ${shown(allowed)}): let the fit run longer, or start one with another seed.`,
      ];
    }
    return [];
  });
  if (effective < LEAST_EFFECTIVE) {
    reasons.push(
      `The independent run is worth ${effective.toFixed(0)} draws, fewer than the ${LEAST_EFFECTIVE} from which it shows modes: let the fit run longer, for the run grows with it.`,
    );
  }
  if (missed) {
    reasons.push(
      `The scan finds ${missed.mu.map((mu, d) => `${names[d]} = ${mu.toFixed(3)}`).join(', ')} better by ${missed.by.toFixed(0)} in ln than anything that the jumps reach: narrow the mass priors round it and compare.`,
    );
  }
  return reasons;
}
