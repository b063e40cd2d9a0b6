import { priorPredictive, type PredictiveBand } from '@/lib/inference/prior-predictive';
import type { Prior } from '@/lib/templates';
import type { Panel } from './prediction';

/** Bands that are kept; the one that was used longest ago goes first. One takes about 8 kB. */
const most = 64;

const bands = new Map<string, PredictiveBand>();

/**
 * The prior predictive band of a prediction. It depends on template, range of κ and priors alone, so the server, which draws the
 * same page for many readers, makes it once and keeps it by these; nobody may change what is given out.
 */
export function keptBand(
  { fine, kappa, seen, from = 0 }: Pick<Panel, 'fine' | 'kappa' | 'seen'> & { from?: number },
  priors: Readonly<Record<string, Prior>>,
  draws: number,
): PredictiveBand {
  // Through a window or with columns it hangs on the measurement, and is made anew.
  if (seen.template !== fine) return priorPredictive(seen.template, priors, draws);
  const ends = [kappa[0], kappa[kappa.length - 1], kappa.length];
  const key = JSON.stringify([fine.id, fine.options, ends, from, priors, draws]);
  const band = bands.get(key) ?? priorPredictive(fine, priors, draws);
  bands.delete(key);
  bands.set(key, band);
  if (bands.size > most) bands.delete(bands.keys().next().value!);
  return band;
}
