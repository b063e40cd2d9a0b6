import type { Rules } from './rule';

/** Data that isn't released is for those who work on it; only a lead sets it blind. */
export const measurementRules = {
  'measurement.read': ['lead', 'analyst', 'referee'],
  'measurement.upload': ['lead', 'analyst'],
  'measurement.blind': ['lead'],
} as const satisfies Rules;
