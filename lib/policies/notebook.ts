import type { Rules } from './rule';

/** A notebook that isn't released is read by those who work on it or judge it, and edited by those who work on it; a lead puts it away. */
export const notebookRules = {
  'notebook.read': ['lead', 'analyst', 'referee'],
  'notebook.create': ['lead', 'analyst'],
  'notebook.edit': ['lead', 'analyst'],
  'notebook.archive': ['lead'],
  'notebook.delete': ['lead'],
} as const satisfies Rules;
