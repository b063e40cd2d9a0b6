import type { Notebook } from '@/lib/schemas';

export type LikelihoodKind = Notebook['likelihood']['kind'];

/** Name and plain meaning of each likelihood. */
export const likelihoods: Record<LikelihoodKind, { label: string; meaning: string; needsMocks: boolean }> = {
  normal: {
    label: 'normal',
    meaning: 'The covariance is taken as known exactly.',
    needsMocks: false,
  },
  hartlap: {
    label: 'normal, inverse covariance rescaled (Hartlap)',
    meaning:
      'The inverse of a covariance from mocks is too large on average; it is rescaled, the shape stays normal.',
    needsMocks: true,
  },
  'sellentin-heavens': {
    label: 't (Sellentin and Heavens)',
    meaning:
      'What the mocks leave unknown of the covariance is integrated over: a t density in place of the normal.',
    needsMocks: true,
  },
  'matched-t': {
    label: 't with matched prior',
    meaning: 'A t density whose exponent makes credible intervals as wide as best fits scatter.',
    needsMocks: true,
  },
};

export const likelihoodKinds = Object.keys(likelihoods) as LikelihoodKind[];
