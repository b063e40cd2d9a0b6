import { isOtherSettings } from '@/components/scan/scan-words';
import type { State } from '@/components/ui/state-word';
import { rankCell, rankRows } from '@/components/figures/rank-layout';
import { about } from '@/components/words/time-left';
import { formatCount, formatPercent } from '@/lib/figures/format';
import type { CheckListed, Notebook } from '@/lib/schemas';

export const isPending = ({ status }: Pick<CheckListed, 'status'>): boolean =>
  status === 'queued' || status === 'running';

interface Checks {
  checks: readonly CheckListed[];
  shown: CheckListed | null;
}

/** The section's state in the contents. */
export function checksState({ checks, shown }: Checks, notebook: Notebook): State {
  const pending = checks.find(isPending);
  if (pending) {
    return pending.status === 'queued'
      ? { kind: 'run', word: 'waits its turn' }
      : { kind: 'run', word: 'checking' };
  }
  if (!shown) return { kind: 'wait', word: 'not checked' };
  if (shown.status === 'failed') return { kind: 'open', word: `check ${shown.number} failed` };
  if (shown.status === 'stopped') return { kind: 'open', word: `check ${shown.number} stopped` };
  if (isOtherSettings(shown.request, notebook)) return { kind: 'old', word: `of revision ${shown.revision}` };
  return shown.calibrated ? { kind: 'ok', word: 'calibrated' } : { kind: 'warn', word: 'not calibrated' };
}

/** The folded section. */
export function checksSentence({ checks, shown }: Checks): string {
  if (!shown) return 'The calibration of the posterior was not checked yet.';
  if (checks.some(isPending)) return 'The calibration of the posterior is being checked.';
  if (shown.calibrated === null) return `Check ${shown.number} found nothing yet.`;
  const over = `over ${formatCount(shown.request.datasets)} simulated data sets`;
  return shown.calibrated
    ? `Calibrated within the band, ${over}.`
    : `Ranks leave their band: not calibrated, ${over}.`;
}

/** How far a check is and when it will end. */
export function progressWords(check: CheckListed): string {
  const { number, done, progress, secondsLeft, request, stopRequested } = check;
  const of = `${formatCount(done)} of ${formatCount(request.datasets)} simulated data sets`;
  if (stopRequested) return `Check ${number} stops after the data sets under way; ${of} are done.`;
  if (check.status === 'queued' || check.message !== null) {
    const where = check.message ?? 'It waits for a worker.';
    return done > 0 ? `Check ${number} has ${of}. ${where}` : `Check ${number}: ${where}`;
  }
  const left = secondsLeft === null ? '' : `, ${about(secondsLeft)} left`;
  return `Check ${number}: ${of} ranked, ${formatPercent(progress)}${left}.`;
}

/** Pixels that the result of a check of so many quantities takes, wide and on a phone, so that its room is kept while it is read. */
export function roomOf({ priors }: Pick<CheckListed['request'], 'priors'>): { wide: number; narrow: number } {
  const quantities = 1 + Object.values(priors).filter(({ kind }) => kind !== 'fixed').length;
  const figures = (narrow: boolean) => 2 * rankCell * rankRows(quantities, narrow);
  return { wide: 770 + figures(false) + 29 * quantities, narrow: 1080 + figures(true) + 84 * quantities };
}
