import { formatCount } from '@/lib/figures/format';
import type { Measurement } from '@/lib/schemas';

/** Where the errors come from: "covariance from 1 200 mocks". */
export function covarianceInWords({
  covarianceSource,
  mockCount,
}: Pick<Measurement, 'covarianceSource' | 'mockCount'>): string {
  if (covarianceSource === 'mocks' && mockCount !== null)
    return `covariance from ${formatCount(mockCount)} mocks`;
  if (covarianceSource === 'file')
    return mockCount === null
      ? 'covariance as given'
      : `covariance as given, from ${formatCount(mockCount)} mocks`;
  return 'errors without correlations';
}

/** The first characters of a checksum, in groups, as the record shows them: "9c41 f0a7". */
export function shortHash(sha256: string): string {
  return `${sha256.slice(0, 4)} ${sha256.slice(4, 8)}`;
}

/** A name as it stands in the names of saved files. */
export const fileNameOf = (name: string): string => name.replace(/[^\w-]+/g, '-').toLowerCase();
