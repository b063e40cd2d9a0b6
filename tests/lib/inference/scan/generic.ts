import { buildLikelihood } from '@/lib/inference';
import { CollapsedModel, freeCoordinates, type CollapsedBlock } from '@/lib/inference/scan';

/**
 * A series with known errors as a collapsed model: cos and sin of 2π f t for every field at frequency f, and the given fixed
 * columns.
 */
export function seriesModel(
  time: readonly number[],
  value: readonly number[],
  error: readonly number[] | null,
  fields: number,
  fixed: readonly ((t: number) => number)[],
): CollapsedModel {
  const n = time.length;
  const sigma = (i: number): number => (error ? error[i] : 1);
  const column = (f: (t: number) => number): Float64Array =>
    Float64Array.from({ length: n }, (_, i) => f(time[i]) / sigma(i));
  const block: CollapsedBlock = {
    data: Float64Array.from({ length: n }, (_, i) => value[i] / sigma(i)),
    likelihood: buildLikelihood('normal', null, n, 1, 0),
    fixed: fixed.map(column),
    widths: new Array<number>(fields).fill(2),
    fill(_, frequency, out) {
      out.set(column((t) => Math.cos(2 * Math.PI * frequency * t)));
      out.set(
        column((t) => Math.sin(2 * Math.PI * frequency * t)),
        n,
      );
    },
  };
  return new CollapsedModel([block], freeCoordinates(2 * fields, null), []);
}
