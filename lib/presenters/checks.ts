import type { Check as CheckRow } from '@/models';
import { verdictWords } from '@/lib/inference/calibration';
import {
  calibrationResultSchema,
  checkRequestSchema,
  checkStatusSchema,
  type CalibrationResult,
  type NotebookCheck,
  type CheckListed,
} from '@/lib/schemas';
import { capital, waitInWords, type QueuePlace } from './fits';

export interface CheckContext {
  /** E-mail address of who asked for it first. */
  startedBy: string;
  /** Where it waits; null where it doesn't. */
  queue: QueuePlace | null;
}

/** What a check found as it is stored; null until it has ended. */
const storedResult = ({ result }: Pick<CheckRow, 'result'>): CalibrationResult | null =>
  result === null ? null : calibrationResultSchema.parse(JSON.parse(result));

/** At the pace so far; null before anything is done, or where nothing goes on. */
function secondsLeft({ done, millisecondsSpent }: CheckRow, status: string, datasets: number): number | null {
  const spent = Number(millisecondsSpent);
  if (status !== 'running' || done === 0 || spent === 0) return null;
  return ((datasets - done) * spent) / done / 1000;
}

export function presentCheck(check: CheckRow, { startedBy, queue }: CheckContext): NotebookCheck {
  const request = checkRequestSchema.parse(check.request);
  const status = checkStatusSchema.parse(check.status);
  const result = storedResult(check);
  const listed: CheckListed = {
    id: check.id,
    notebookId: check.notebookId,
    number: check.number,
    kind: request.kind,
    status,
    message: queue ? capital(waitInWords(queue)) : check.message,
    done: check.done,
    progress: check.done / request.datasets,
    secondsLeft: secondsLeft(check, status, request.datasets),
    stopRequested: check.stopRequested,
    revision: check.revision,
    request: { ...request, sha256: check.requestSha256 },
    calibrated: result?.calibrated ?? null,
    verdict: result && verdictWords(result),
    startedBy,
    createdAt: check.createdAt.toISOString(),
    endedAt: check.endedAt?.toISOString() ?? null,
  };
  return { ...listed, result };
}
