import type { Rules } from './rule';

/** Checks follow their notebook: who may edit it may run them, who may read it sees what they found. */
export const checkRules = {
  'check.read': ['lead', 'analyst', 'referee'],
  'check.start': ['lead', 'analyst'],
  'check.stop': ['lead', 'analyst'],
} as const satisfies Rules;
