import { Fit } from '@/models';
import type { Snapshot } from '@/lib/schemas';

/** Recorded draws a second of a model of one parameter, where nothing was measured yet. */
const standardRate = 12_000;

interface Course {
  snapshot: Pick<Snapshot, 'replicas' | 'warmup' | 'priors'>;
  /** Recorded draws a replica that are there. */
  draws: number;
  maxDraws: number;
  /** Recorded draws a second, all replicas together, of the fit itself or one like it. */
  rate: number | null;
}

/**
 * Seconds of sampling that a fit takes if it spends its budget: what there is left to draw, over the rate at which it or
 * its predecessor went; before any was measured, over one that falls with the number of parameters.
 */
export function expectedSeconds({ snapshot, draws, maxDraws, rate }: Course): number {
  const sampled = Object.values(snapshot.priors).filter(({ kind }) => kind !== 'fixed').length;
  const assumed = rate !== null && rate > 0 ? rate : standardRate / Math.max(1, sampled);
  return (snapshot.replicas * Math.max(0, snapshot.warmup + maxDraws - draws)) / assumed;
}

/** The rate of the notebook's last fit that had one. */
export async function lastRate(notebookId: string): Promise<number | null> {
  const fits = await Fit.findAll({
    where: { notebookId },
    attributes: ['drawsPerSecond'],
    order: [['number', 'DESC']],
    limit: 5,
  });
  return fits.find(({ drawsPerSecond }) => drawsPerSecond !== null)?.drawsPerSecond ?? null;
}
