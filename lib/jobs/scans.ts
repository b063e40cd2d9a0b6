import { z } from 'zod';

/** The queue that wakes workers up for scans; a job says which to look at, the database says what it is. */
export const scansQueue = 'scans';

export const scanJobSchema = z.object({ scanId: z.uuid() });
export type ScanJob = z.infer<typeof scanJobSchema>;

export const scanJobId = (scanId: string, epoch: number): string => `scan-${scanId}-${epoch}`;
