import { comparisonSchema, comparisonStartedSchema, startComparisonSchema } from '@/lib/schemas';

/** Rows of the comparison of a notebook's fits. */
export const comparisonRoutes = {
  'POST /notebooks/:id/comparisons': {
    summary:
      'Start the fits with 0, 1 and 2 fields, or as many as are named; those that are there are taken.',
    permission: 'fit.start',
    body: startComparisonSchema,
    answer: comparisonStartedSchema,
    status: 202,
  },
  'GET /notebooks/:id/comparison': {
    summary: 'A notebook’s fits side by side: evidences, Bayes factors, shared parameters.',
    permission: 'notebook.read',
    answer: comparisonSchema,
  },
} as const;
