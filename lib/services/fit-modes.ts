import { InferenceError } from '@/lib/inference';
import { scanModes } from '@/lib/inference/scan';
import { specOf, type FitModel } from './fit-model';
import type { ScannedModes } from './fit-report';

/**
 * The modes of a fit's posterior as a scan has them: a function of the snapshot alone. Null where there is nothing to compare:
 * no mass, a fixed one, more than two.
 */
export function scannedModes(model: FitModel): ScannedModes | null {
  const spec = specOf(model);
  try {
    const scan = scanModes(spec, model.snapshot.seed);
    const masses = spec.template.parameters.filter(({ role }) => role === 'mass').map(({ name }) => name);
    return scan && { scan, masses };
  } catch (error) {
    // What can't be scanned can be fitted all the same.
    if (error instanceof InferenceError) return null;
    throw error;
  }
}
