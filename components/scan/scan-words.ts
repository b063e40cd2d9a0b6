import { inWords, plain } from '@/components/words/counts';
import { formatCount, formatNumber } from '@/lib/figures/format';
import type { Notebook, Scan, Trials } from '@/lib/schemas';
import type { State } from '@/components/ui/state-word';
import { isLocked } from './coverage';

/** A probability with the two figures that matter: 0.013, 5 × 10⁻⁵. */
export const probability = (p: number): string => (p > 0.995 ? '1' : plain(p, 2).replace(/^1 × /, ''));

export const isPending = ({ status }: Pick<Scan, 'status'>): boolean =>
  status === 'queued' || status === 'running';

/** How often as high a maximum comes without a signal, by which nulls, and what so many can't tell. */
export function globalWords(p: number, nulls: number): string {
  const higher = Math.round(p * (nulls + 1)) - 1;
  const least = probability(1 / (nulls + 1));
  const limit = `A p below 1/(${formatCount(nulls)} + 1) = ${least} can’t be told from ${formatCount(nulls)} nulls.`;
  if (higher <= 0) return `none of ${formatCount(nulls)} nulls rose as high, so that p ≤ ${least}. ${limit}`;
  return `p = ${probability(p)}: ${formatCount(higher)} of ${formatCount(nulls)} nulls rose as high somewhere in the range. ${limit}`;
}

/** What the global p comes to, in calm words. */
export function verdict(p: number, nulls: number): string {
  if (p > 0.05)
    return 'Nothing stands out: measurements without a signal rise as high often enough. That is a result like any other, and bounds what a signal could be.';
  if (p <= 0.003)
    return 'That is hard to come by without a signal. What else could make it, such as the covariance or the background, is not judged by this number.';
  if (Math.round(p * (nulls + 1)) <= 1)
    return 'It is rarer than so few nulls can tell; a scan with more of them says how rare.';
  return 'That is unusual without a signal, and not enough by itself to speak of one.';
}

/** What the local p was read off. */
export function localReference({ request, freedom }: Pick<Scan, 'request' | 'freedom'>): string {
  if (freedom === null) return 'no reference distribution, as the fit at one frequency isn’t linear';
  if (request.mockCount === null)
    return `χ² with ${inWords(freedom)} ${freedom === 1 ? 'degree' : 'degrees'} of freedom, as the covariance is known`;
  return `an F distribution for ${inWords(freedom)} added ${freedom === 1 ? 'coefficient' : 'coefficients'}, as the covariance is estimated from ${formatCount(request.mockCount)} mocks`;
}

/** The quick formula beside the nulls, or why it isn't used. */
export function upcrossingWords(scan: Pick<Scan, 'request' | 'globalPUpcrossing'>): string {
  if (isLocked(scan.request.template))
    return 'The formula from upcrossings is not used here: with a locked phase Δχ² oscillates within one excursion, which then crosses several times, so that the formula counts too many. The simulated p is the one to quote.';
  if (scan.request.mockCount !== null)
    return 'The formula from upcrossings holds for a known covariance only; here each null draws its covariance anew.';
  if (scan.globalPUpcrossing === null) return '';
  return `From the upcrossings of the nulls, by Gross and Vitells’ formula, p ≈ ${probability(scan.globalPUpcrossing)}.`;
}

/** The sentence of the log, with the smallest p alone and what is left of it beside the other looks. */
export function trialWords({ statement, method, smallestP, globalP }: Trials): string {
  if (globalP === null || smallestP === null || method === 'none') return statement;
  return `${statement} The smallest p of one look alone is ${probability(smallestP)}; counting all of them, p = ${probability(globalP)}.`;
}

/** JSON with the names of every object in order, so that equal settings are equal texts. */
function ordered(value: unknown): unknown {
  if (Array.isArray(value)) return value.map(ordered);
  if (typeof value !== 'object' || value === null) return value;
  return Object.fromEntries(
    Object.entries(value)
      .sort(([a], [b]) => (a < b ? -1 : 1))
      .map(([name, inner]) => [name, ordered(inner)]),
  );
}

type AskedSettings = Pick<
  Scan['request'],
  'cuts' | 'likelihood' | 'template' | 'priors' | 'measurementVersion'
>;

/** True where the notebook has other settings by now than those that were scanned, or checked. */
export function isOtherSettings(request: AskedSettings, notebook: Notebook): boolean {
  const asked = {
    cuts: request.cuts,
    likelihood: request.likelihood,
    template: [request.template.id, request.template.options],
    priors: request.priors,
    version: request.measurementVersion,
  };
  const now = {
    cuts: notebook.cuts,
    likelihood: notebook.likelihood,
    template: [notebook.template.id, notebook.template.options],
    priors: notebook.priors,
    version: notebook.measurement.version,
  };
  return JSON.stringify(ordered(asked)) !== JSON.stringify(ordered(now));
}

/** The section's state in the contents. `scan` is the one that is shown, as far as it is known. */
export function scanState(trials: Trials, scan: Scan | null, notebook: Notebook): State {
  if (notebook.blind) return { kind: 'blind', word: 'coverage alone' };
  const last = trials.trials.at(-1);
  if (!last) return { kind: 'wait', word: 'not scanned' };
  if (trials.trials.some(isPending)) return { kind: 'run', word: 'scanning' };
  if (!scan) return { kind: 'ok', word: `scan ${last.number}` };
  if (scan.status === 'failed') return { kind: 'open', word: `scan ${scan.number} failed` };
  if (isOtherSettings(scan.request, notebook)) return { kind: 'old', word: 'of other settings' };
  return { kind: 'ok', word: `scan ${scan.number}` };
}

/** The folded section: the best frequency and its global p. */
export function scanSentence(scan: Scan | null, notebook: Pick<Notebook, 'blind'>): string {
  if (notebook.blind) return 'What the bins can see; scans are withheld until the measurement is unblinded.';
  if (!scan?.best) return 'What the bins can see; no scan shown.';
  const p = scan.globalP === null ? '' : `, global p ${probability(scan.globalP)}`;
  return `Scan ${scan.number}: best μ = ${formatNumber(scan.best.mu, 3)}, Δχ² = ${formatNumber(scan.best.deltaChi2, 1)}${p}.`;
}
