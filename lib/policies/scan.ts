import type { Rules } from './rule';

/** Scans follow their notebook: who may edit it may scan, who may read it sees what was found. */
export const scanRules = {
  'scan.read': ['lead', 'analyst', 'referee'],
  'scan.start': ['lead', 'analyst'],
} as const satisfies Rules;
