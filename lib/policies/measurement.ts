import type { Rules } from './rule';

/** Data that isn't released is for those who work on it; only a lead sets it blind or deletes it. */
export const measurementRules = {
  'measurement.read': ['lead', 'analyst', 'referee'],
  'measurement.upload': ['lead', 'analyst'],
  'measurement.edit': ['lead', 'analyst'],
  'measurement.delete': ['lead'],
  'measurement.blind': ['lead'],
} as const satisfies Rules;
