import type { Rules } from './rule';

/** A notebook that isn't released is read by those who work on it or judge it, and edited by those who work on it. */
export const notebookRules = {
  'notebook.read': ['lead', 'analyst', 'referee'],
  'notebook.create': ['lead', 'analyst'],
  'notebook.edit': ['lead', 'analyst'],
} as const satisfies Rules;
