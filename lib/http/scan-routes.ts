import { scanSchema, startScanSchema, trialsSchema } from '@/lib/schemas';

/** Rows of the scans of a notebook's measurement. */
export const scanRoutes = {
  'POST /notebooks/:id/scan': {
    summary: 'Scan for frequencies; answers when it has ended, or 202 with its id after a minute.',
    permission: 'scan.start',
    body: startScanSchema,
    answer: scanSchema,
  },
  'GET /notebooks/:id/trials': {
    summary:
      'Everything that a notebook was scanned with, and the significance that is left of the best of it.',
    permission: 'notebook.read',
    answer: trialsSchema,
  },
  'GET /scans/:id': { summary: 'A scan with its result.', permission: 'scan.read', answer: scanSchema },
} as const;
