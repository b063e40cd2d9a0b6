import { capital, inWords } from '@/components/words/counts';
import { formatCount, formatNumber } from '@/lib/figures/format';
import type { CalibrationResult, CheckListed } from '@/lib/schemas';

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
