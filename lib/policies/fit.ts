import type { Rules } from './rule';

/** Fits follow their notebook: who may edit it may run them, who may read it may take the samples. */
export const fitRules = {
  'fit.read': ['lead', 'analyst', 'referee'],
  'fit.start': ['lead', 'analyst'],
  'fit.stop': ['lead', 'analyst'],
  'fit.resume': ['lead', 'analyst'],
  'fit.extend': ['lead', 'analyst'],
} as const satisfies Rules;
