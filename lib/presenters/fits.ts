import type { Fit as FitRow } from '@/models';
import { actionsFor } from '@/lib/policies';
import {
  endedStatuses,
  fitStatusSchema,
  snapshotSchema,
  type Fit,
  type FitStatus,
  type Role,
} from '@/lib/schemas';
import { emptyReport, storedReportSchema, type StoredReport } from '@/lib/schemas/stored-report';

/** Where a fit that waits stands, and what it waits for. */
export interface QueuePlace {
  place: number;
  groupRunning: number;
  groupLimit: number;
  /** Fits that run, of all groups. */
  running: number;
  /** Fits that all living workers take at once; null where that can't be told. */
  places: number | null;
}

/** What a fit is shown with beside its row. */
export interface FitContext {
  /** E-mail address of who started it. */
  startedBy: string;
  role: Role;
  /** While a measurement is blind nothing that was fitted to it is shown. */
  blind: boolean;
  /** Null where it doesn't wait. */
  queue: QueuePlace | null;
}

const ordinals = [
  '',
  'first',
  'second',
  'third',
  'fourth',
  'fifth',
  'sixth',
  'seventh',
  'eighth',
  'ninth',
  'tenth',
];
const ordinal = (place: number): string => ordinals[place] ?? `number ${place}`;
const fits = (count: number): string => (count === 1 ? '1 fit' : `${count} fits`);

/** Its place in the queue and why it waits. */
export function waitInWords({ place, groupRunning, groupLimit, running, places }: QueuePlace): string {
  const where = `${ordinal(place)} in the queue`;
  if (places === 0) return `${where}; no worker is running, and it begins when one does.`;
  if (groupRunning >= groupLimit) return `${where}; your group has ${fits(groupRunning)} running, the limit.`;
  if (places !== null && running >= places)
    return `${where}; every worker is busy, with ${fits(running)} running.`;
  if (place === 1) return `${where}; a worker is about to take it up.`;
  return `${where}; those before it begin first.`;
}

export const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

const isHeld = (fit: FitRow): boolean => fit.leaseUntil !== null && fit.leaseUntil.getTime() > Date.now();

function messageOf(fit: FitRow, status: FitStatus, queue: QueuePlace | null): string | null {
  if (fit.message !== null) return fit.message;
  if (status === 'budget-spent') {
    return `The budget of ${fit.maxDraws} kept draws a replica was spent before every quantity met the target.`;
  }
  if (endedStatuses.includes(status)) return null;
  if (!isHeld(fit)) {
    const wait = queue ? waitInWords(queue) : 'it waits for a worker.';
    return fit.draws === 0
      ? capital(wait)
      : `After ${fit.draws} draws a replica it goes on by itself from there: ${wait}`;
  }
  if (fit.stopRequested) return 'It stops at the end of the present block.';
  if (fit.targetFrom > 0) return 'The target was met before: sampling goes on to the end of the budget.';
  return null;
}

/** Kept draws a replica at which the fit is expected to end. */
function expectedEnd(fit: FitRow, report: StoredReport): number {
  const target = report.wanted === null ? fit.maxDraws : Math.max(report.wanted, fit.targetFrom);
  return Math.min(fit.maxDraws, target);
}

function progressOf(fit: FitRow, status: FitStatus, report: StoredReport, warmup: number, replicas: number) {
  const kept = Math.max(0, fit.draws - warmup);
  const finished = status === 'converged' || status === 'budget-spent';
  const end = expectedEnd(fit, report);
  const rate = fit.drawsPerSecond;
  const left = rate !== null && rate > 0 ? Math.max(0, warmup + end - fit.draws) / (rate / replicas) : null;
  return {
    warmup: Math.min(fit.draws, warmup),
    warmupTotal: warmup,
    draws: kept,
    maxDraws: fit.maxDraws,
    fraction: finished ? 1 : Math.min(1, kept / end),
    secondsLeft: endedStatuses.includes(status) ? 0 : left,
    secondsSpent: Number(fit.millisecondsSpent) / 1000,
  };
}

/** What may be done with a fit in its state, of what the role allows. */
function mayOf(fit: FitRow, status: FitStatus, role: Role): string[] {
  const ended = endedStatuses.includes(status);
  const possible: Readonly<Record<string, boolean>> = {
    'fit.stop': !ended && !fit.stopRequested,
    'fit.resume': status === 'stopped' || status === 'failed' || (!ended && fit.stopRequested),
    'fit.extend': status !== 'failed',
  };
  return actionsFor(role, 'fit').filter((action) => possible[action] ?? true);
}

export function presentFit(fit: FitRow, { startedBy, role, blind, queue }: FitContext): Fit {
  const status = fitStatusSchema.parse(fit.status);
  const stored = fit.report === null ? emptyReport : storedReportSchema.parse(fit.report);
  const report = blind ? emptyReport : stored;
  const snapshot = snapshotSchema.parse(fit.snapshot);
  return {
    id: fit.id,
    notebookId: fit.notebookId,
    number: fit.number,
    revision: fit.revision,
    status,
    message: messageOf(fit, status, queue),
    queue: queue && { place: queue.place, groupRunning: queue.groupRunning, groupLimit: queue.groupLimit },
    progress: progressOf(fit, status, stored, snapshot.warmup, snapshot.replicas),
    replicas: snapshot.replicas,
    drawsPerSecond: fit.drawsPerSecond,
    acceptance: report.acceptance,
    ladder: report.ladder,
    diagnostics: report.diagnostics,
    history: report.history,
    modes: report.modes,
    modesOf: report.modesOf,
    logEvidence: report.logEvidence,
    noEvidence: report.noEvidence,
    gate: {
      met: report.gate.met,
      target: { rhat: fit.targetRhat, ess: fit.targetEss },
      reasons: blind ? ['The measurement is blind: nothing of the fit is shown.'] : report.gate.reasons,
    },
    snapshot: { ...snapshot, sha256: fit.snapshotSha256 },
    startedBy,
    createdAt: fit.createdAt.toISOString(),
    startedAt: fit.startedAt?.toISOString() ?? null,
    endedAt: fit.endedAt?.toISOString() ?? null,
    committedAt: fit.committedAt?.toISOString() ?? null,
    may: mayOf(fit, status, role),
  };
}
