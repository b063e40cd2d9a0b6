import { z } from 'zod';
import {
  checkListedSchema,
  notebookCheckSchema,
  startCheckQuerySchema,
  startCheckSchema,
} from '@/lib/schemas';

/** Rows of the checks of a notebook's posterior. */
export const checkRoutes = {
  'POST /notebooks/:id/checks': {
    summary:
      'Check the calibration of the notebook’s template by simulation; answers when it has ended, or 202 with its id after as many seconds as `wait` says. The same request has one check: asking again goes on with a stopped one.',
    permission: 'check.start',
    query: startCheckQuerySchema,
    body: startCheckSchema,
    answer: notebookCheckSchema,
  },
  'GET /notebooks/:id/checks': {
    summary: 'The checks of a notebook, first to last, without what they found.',
    permission: 'notebook.read',
    answer: z.array(checkListedSchema),
  },
  'GET /checks/:id': {
    summary: 'A check with its ranks, bands, coverage and verdict.',
    permission: 'check.read',
    answer: notebookCheckSchema,
  },
  'POST /checks/:id/stop': {
    summary: 'Stop a check; the data sets that are done stay.',
    permission: 'check.stop',
    answer: notebookCheckSchema,
  },
} as const;
