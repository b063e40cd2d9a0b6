import type { Rules } from './rule';

/** Leads run a group; every member sees who belongs to it. */
export const groupRules = {
  'group.read': ['lead', 'analyst', 'referee', 'reader'],
  'group.leave': ['lead', 'analyst', 'referee', 'reader'],
  'group.rename': ['lead'],
  'group.invite': ['lead'],
  'group.roles': ['lead'],
  'group.remove': ['lead'],
  'group.audit': ['lead', 'analyst', 'referee'],
} as const satisfies Rules;
