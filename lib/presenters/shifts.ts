import type { Fit } from '@/models';
import { shiftOf } from '@/lib/figures/shift';
import {
  endedStatuses,
  fitStatusSchema,
  type Diagnostic,
  type Marginal,
  type Shift,
  type Shifts,
  type Snapshot,
} from '@/lib/schemas';
import { storedReportSchema } from '@/lib/schemas/stored-report';

interface Side {
  fit: Pick<Fit, 'id' | 'number' | 'status' | 'report'>;
  snapshot: Snapshot;
}

/** A fit and the one that repeats it. */
export interface FitPair {
  old: Side;
  new: Side;
}

/** A fit that still moves has no values here: a shift of half the draws would be read as one of the data. */
function diagnosticsOf({ fit }: Side): readonly Diagnostic[] {
  if (fit.report === null || !endedStatuses.includes(fitStatusSchema.parse(fit.status))) return [];
  return storedReportSchema.parse(fit.report).diagnostics;
}

/** Median and 68 % interval as they are shown; null where they have no value. */
export function marginalOf(diagnostic: Diagnostic | undefined): Marginal | null {
  if (!diagnostic) return null;
  const { q50, q16, q84, sd, mcseMean } = diagnostic;
  if (q50 === null || q16 === null || q84 === null || sd === null) return null;
  // √(π/2) times the error of the mean for a normal density; only the digits shown hang on it.
  const mcse = mcseMean === null ? null : Math.sqrt(Math.PI / 2) * mcseMean;
  return { median: q50, lo68: q16, hi68: q84, sd, mcse };
}

const sideOf = ({ fit, snapshot }: Side) => ({
  id: fit.id,
  number: fit.number,
  version: snapshot.measurementVersion,
  status: fitStatusSchema.parse(fit.status),
});

function shiftsOf(pair: FitPair): Shift[] {
  const before = diagnosticsOf(pair.old);
  const after = new Map(diagnosticsOf(pair.new).map((each) => [each.parameter, each]));
  return before.map((each) => {
    const old = marginalOf(each);
    const now = marginalOf(after.get(each.parameter));
    const moved = old && now ? shiftOf(old, now) : null;
    return {
      parameter: each.parameter,
      derived: each.derived,
      old,
      new: now,
      shift: moved?.shift ?? null,
      shiftMcse: moved?.mcse ?? null,
    };
  });
}

/** While the measurement is blind no value is among them. */
export function presentShifts(pairs: readonly FitPair[], blind: boolean): Shifts {
  return {
    pairs: pairs.map((pair) => ({
      template: { id: pair.new.snapshot.template.id, options: pair.new.snapshot.template.options },
      old: sideOf(pair.old),
      new: sideOf(pair.new),
      shifts: blind ? [] : shiftsOf(pair),
    })),
  };
}
