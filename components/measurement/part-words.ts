import type { FilePart } from '@/lib/schemas';

/** What a file of an upload holds. */
export const partWords: Readonly<Record<FilePart, string>> = {
  file: 'points',
  covariance: 'covariance',
  mocks: 'mocks',
  window: 'window',
  columns: 'columns',
  theoryCovariance: 'theory covariance',
};

/** The same as a choice beside a file. */
export const partOptions: { value: FilePart; label: string }[] = [
  { value: 'file', label: 'the points' },
  { value: 'mocks', label: 'mocks, one a row' },
  { value: 'covariance', label: 'their covariance' },
  { value: 'window', label: 'a window matrix' },
  { value: 'columns', label: 'columns to fit' },
  { value: 'theoryCovariance', label: 'a theory covariance' },
];
