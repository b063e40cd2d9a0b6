import { covarianceInWords } from './measurement-words';
import type { MeasurementListed } from '@/lib/schemas';

export const orders = [
  { value: 'newest', label: 'stored last' },
  { value: 'name', label: 'name' },
  { value: 'bins', label: 'most bins' },
  { value: 'notebooks', label: 'most notebooks' },
] as const;
export type Order = (typeof orders)[number]['value'];

const comparisons: Record<Order, (a: MeasurementListed, b: MeasurementListed) => number> = {
  newest: (a, b) => b.uploadedAt.localeCompare(a.uploadedAt),
  name: (a, b) => a.name.localeCompare(b.name, 'en', { numeric: true }),
  bins: (a, b) => b.rows - a.rows,
  notebooks: (a, b) => b.notebooks - a.notebooks,
};

const plainly = (text: string): string => text.normalize('NFKC').toLowerCase();

/** Those that hold every word of the search, in name, description, covariance, origin or who stored it; in that order. */
export function found(
  measurements: readonly MeasurementListed[],
  search: string,
  order: Order,
): MeasurementListed[] {
  const words = plainly(search).split(/\s+/).filter(Boolean);
  return measurements
    .filter((one) => {
      const { name, description, version, uploadedBy, simulated } = one;
      const text = plainly(
        `${name} version ${version} ${description} ${uploadedBy} ${covarianceInWords(one)} ${simulated ? 'simulated' : 'measured'}`,
      );
      return words.every((word) => text.includes(word));
    })
    .sort(comparisons[order]);
}
