import { isRunning } from '@/components/fit/fit-words';
import { likelihoods } from '@/components/notebook/likelihood-words';
import { counted, plain } from '@/components/words/counts';
import { withoutBins } from '@/components/words/left-out';
import { decimalsByMcse, formatNumber } from '@/lib/figures/format';
import type { ComparedFit, Comparison } from '@/lib/schemas';
import type { LikelihoodKind } from '@/components/notebook/likelihood-words';

type WithError = NonNullable<ComparedFit['logEvidence']>;

/** Errors at or below rounding: what was computed without sampling. */
const roundingError = 1e-7;

/** "77.1 ± 0.02": no digit of the value finer than twice the error, one figure of the error. An exact one has no error. */
export function withError({ value, error }: WithError): { value: string; error: string | null } {
  if (error <= roundingError) return { value: formatNumber(value, 3), error: null };
  const decimals = Math.max(0, Math.min(4, decimalsByMcse(error)));
  const places = Math.max(0, Math.min(6, Math.ceil(-Math.log10(error) - 1e-9)));
  return { value: formatNumber(value, decimals), error: formatNumber(error, places) };
}

/** "no field", "one field", "two fields" */
export const fieldsInWords = (fields: number): string =>
  counted(fields, 'field', fields === 0 ? 'field' : 'fields');

/** "version 2, κ from 0.01 to 0.2" */
export function dataInWords({
  measurementVersion,
  cuts,
}: Pick<ComparedFit, 'measurementVersion' | 'cuts'>): string {
  const { kappaMin, kappaMax } = cuts;
  const ends = [
    ...(kappaMin === undefined ? [] : [`κ ≥ ${plain(kappaMin)}`]),
    ...(kappaMax === undefined ? [] : [`κ ≤ ${plain(kappaMax)}`]),
    ...(cuts.excluded?.length ? [withoutBins(cuts)] : []),
  ];
  return [`version ${measurementVersion}`, ...(ends.length ? ends : ['all bins'])].join(', ');
}

/** The likelihood that a set's evidences are of, in words. */
export const evidenceKindInWords = (kind: string): string =>
  kind in likelihoods ? likelihoods[kind as LikelihoodKind].label : kind;

export const anyRunning = (comparison: Comparison): boolean =>
  comparison.sets.some(({ fits }) => fits.some(({ status }) => isRunning(status)));

/** Fits by their ids, of all sets. */
export const fitsById = ({ sets }: Comparison): ReadonlyMap<string, ComparedFit> =>
  new Map(sets.flatMap(({ fits }) => fits.map((fit) => [fit.id, fit] as const)));
