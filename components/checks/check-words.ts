import { isOtherSettings } from '@/components/scan/scan-words';
import type { State } from '@/components/ui/state-word';
import { rankCell, rankRows } from '@/components/figures/rank-layout';
import { capital, inWords } from '@/components/words/counts';
import { about } from '@/components/words/time-left';
import { formatCount, formatNumber, formatPercent } from '@/lib/figures/format';
import type { CalibrationResult, CheckListed, Notebook } from '@/lib/schemas';

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

/** Which noise was simulated, and why ranks then have to be uniform. */
export function noiseWords({
  likelihood,
  mockCount,
}: Pick<CheckListed['request'], 'likelihood' | 'mockCount'>): string {
  const mocks = mockCount === null ? 'the mocks' : `${formatCount(mockCount)} mocks`;
  switch (likelihood.kind) {
    case 'normal':
      return mockCount === null
        ? 'The noise is normal, with the covariance as it was given.'
        : `The noise is normal, with the covariance of ${mocks} taken as exact, as this likelihood takes it.`;
    case 'hartlap':
      return `The noise is normal, with the covariance of ${mocks} divided by Hartlap’s factor, as this likelihood takes it.`;
    default:
      return `The noise is drawn from the multivariate t that this likelihood is as a density of the data, with the covariance of ${mocks} kept as it stands. A truth and its data are then one draw of prior times likelihood, so that ranks have to be uniform; whether that covariance is a fair estimate isn’t asked.`;
  }
}

/** How the posteriors were sampled and thinned. */
export function thinningWords(
  { made, leastEss, draws }: Pick<CalibrationResult, 'made' | 'leastEss' | 'draws'>,
  { warmup }: Pick<CheckListed['request'], 'warmup'>,
): string {
  return `Each posterior was sampled by one chain with the moves of a fit: ${formatCount(warmup)} draws of warm-up, then on average ${formatCount(Math.round(made.mean))} and at most ${formatCount(made.most)}, until every quantity had an effective size of ${formatCount(2 * draws)}. ${capital(inWords(draws))} of them at equal distances are ranked, far enough apart to count as independent. The least effective size was ${formatCount(Math.floor(leastEss))}.`;
}

/** How far from uniform ranks may be before so many data sets tell: the half-width of the band in the middle. */
export function bandHalfWidth({ band, datasets }: Pick<CalibrationResult, 'band' | 'datasets'>): number {
  const middle = Math.floor(band.lower.length / 2);
  return (band.upper[middle] - band.lower[middle]) / 2 / datasets;
}

/** What a check of so many data sets can't see. */
export const sightWords = (result: Pick<CalibrationResult, 'band' | 'datasets'>): string =>
  `With ${formatCount(result.datasets)} data sets the share of truths below the posterior’s median is told from one half where it is more than ${formatNumber(100 * bandHalfWidth(result), 0)} percentage points away; a smaller fault passes for chance.`;

/** Shares of truths, in %, between which an interval's coverage keeps. */
export const coverageBounds = (
  { lower, upper }: CalibrationResult['coverage'][number],
  datasets: number,
): string => `${formatNumber((100 * lower) / datasets, 1)} to ${formatNumber((100 * upper) / datasets, 1)}`;

/** Pixels that the result of a check of so many quantities takes, wide and on a phone, so that its room is kept while it is read. */
export function roomOf({ priors }: Pick<CheckListed['request'], 'priors'>): { wide: number; narrow: number } {
  const quantities = 1 + Object.values(priors).filter(({ kind }) => kind !== 'fixed').length;
  const figures = (narrow: boolean) => 2 * rankCell * rankRows(quantities, narrow);
  return { wide: 770 + figures(false) + 29 * quantities, narrow: 1080 + figures(true) + 84 * quantities };
}
