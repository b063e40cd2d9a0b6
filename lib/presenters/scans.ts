import type { Scan as ScanRow } from '@/models';
import {
  scanRequestSchema,
  scanResultSchema,
  scanStatusSchema,
  type Scan,
  type ScanResult,
} from '@/lib/schemas';

export interface ScanContext {
  /** E-mail address of who asked for it first. */
  startedBy: string;
  /** While a measurement is blind nothing that was found in it is shown. */
  blind: boolean;
}

const nothing: { [K in keyof ScanResult]: null } = {
  mu: null,
  deltaChi2: null,
  logEvidence: null,
  backgroundLogEvidence: null,
  best: null,
  localP: null,
  freedom: null,
  globalP: null,
  nulls: null,
  globalPUpcrossing: null,
  thresholds: null,
  aliases: null,
  coverage: null,
  window: null,
  plane: null,
};

/** What a scan found as it is stored; null until it has ended. */
export const storedResult = ({ result }: Pick<ScanRow, 'result'>): ScanResult | null =>
  result === null ? null : scanResultSchema.parse(JSON.parse(result));

export function presentScan(scan: ScanRow, { startedBy, blind }: ScanContext): Scan {
  const status = scanStatusSchema.parse(scan.status);
  const request = scanRequestSchema.parse(scan.request);
  return {
    id: scan.id,
    notebookId: scan.notebookId,
    number: scan.number,
    status,
    message: blind ? 'The measurement is blind: nothing that was found in it is shown.' : scan.message,
    progress: scan.progress,
    blind,
    request: { ...request, sha256: scan.requestSha256 },
    startedBy,
    createdAt: scan.createdAt.toISOString(),
    endedAt: scan.endedAt?.toISOString() ?? null,
    ...((blind ? null : storedResult(scan)) ?? nothing),
  };
}
