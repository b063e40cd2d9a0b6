import { LOG_LIKELIHOOD } from './quantity-name';
import type { CalibrationSummary } from './summarise';
import type { RankShape } from './verdict';

/** What the ranks of a parameter show of its posterior. */
const ofParameter: Readonly<Record<RankShape, (name: string) => string>> = {
  'too narrow': (name) =>
    `posterior too narrow in ${name}: U-shaped ranks, the truth lies outside more often than the posterior says`,
  'too wide': (name) =>
    `posterior too wide in ${name}: ranks heap up in the middle, the truth lies nearer than the posterior says`,
  'too low': (name) => `posterior too low in ${name}: the truths rank high`,
  'too high': (name) => `posterior too high in ${name}: the truths rank low`,
};

/** The same of the log-likelihood at the truth. */
const ofLikelihood: Readonly<Record<RankShape, string>> = {
  'too low':
    'the log-likelihood at the truth ranks high: posterior draws fit their data worse than the truth does',
  'too high':
    'the log-likelihood at the truth ranks low: posterior draws fit their data better than they should',
  'too narrow':
    'the log-likelihood at the truth has U-shaped ranks: data scatter otherwise than the likelihood takes them to',
  'too wide': 'the log-likelihood at the truth ranks in the middle too often',
};

const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** What the shape of one quantity's ranks means, without capital and full stop. */
export const shapeWords = (name: string, shape: RankShape, nameOf: (name: string) => string): string =>
  name === LOG_LIKELIHOOD ? ofLikelihood[shape] : ofParameter[shape](nameOf(name));

/** Datasets without a mixed chain and what was done with them; empty where there are none. */
export function unmixedWords({
  unmixed,
  datasets,
  calibrated,
}: Pick<CalibrationSummary, 'unmixed' | 'datasets' | 'calibrated'>): string {
  if (unmixed.length === 0) return '';
  const which = unmixed.slice(0, 8).join(', ');
  const more = unmixed.length > 8 ? ` and ${unmixed.length - 8} more` : '';
  const [sets, their] =
    unmixed.length === 1 ? ['data set', 'its ranks are'] : ['data sets', 'their ranks are'];
  const so = calibrated ? '' : ', so that the departure may be the sampler’s and not the posterior’s';
  return `${unmixed.length} of ${datasets} chains did not mix (${sets} ${which}${more}): ${their} counted with the others${so}.`;
}

/**
 * The verdict in sentences: calibrated, or what each quantity that leaves its band shows.
 *
 * @param nameOf how a parameter is called
 */
export function verdictWords(
  summary: Pick<CalibrationSummary, 'calibrated' | 'datasets' | 'alpha' | 'unmixed'> & {
    quantities: readonly { name: string; shape: RankShape | null }[];
  },
  nameOf: (name: string) => string = (name) => name,
): string {
  const { quantities, alpha } = summary;
  const odds = `which ranks of a calibrated posterior do in at most ${100 * alpha} % of such checks`;
  const away = quantities.flatMap(({ name, shape }) => (shape ? [shapeWords(name, shape, nameOf)] : []));
  const all = `all ${quantities.length} quantities`;
  const first = summary.calibrated
    ? `Calibrated within the band: the ranks of ${all} keep within it, over ${summary.datasets} simulated data sets.`
    : `Not calibrated: ${away.length} of ${quantities.length} quantities leave their band, ${odds}. ${away.map((each) => `${capital(each)}.`).join(' ')}`;
  return [first, unmixedWords(summary)].filter(Boolean).join(' ');
}
