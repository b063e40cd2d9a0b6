import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { measurementLabels } from './kept-points';

type Frozen = Pick<Fit['snapshot'], 'also'>;

/**
 * The further measurements of a fit, in their order, among those of the notebook: the same file in the same version. Null where one
 * isn't there any more.
 */
export function furtherOfFit(
  { also = [] }: Frozen,
  measurements: readonly Measurement[],
): Measurement[] | null {
  const found = also.map(({ inputs, measurementVersion }) =>
    measurements.find(
      ({ version, files }) =>
        version === measurementVersion &&
        inputs.every(({ part, sha256 }) =>
          files.some((file) => file.part === part && file.sha256 === sha256),
        ),
    ),
  );
  return found.every((each) => each !== undefined) ? found : null;
}

/** What a fit's measurements are called: by name where it has as many as the notebook, else by their numbers. */
export function labelsOfFit(fit: Pick<Fit, 'snapshot'>, notebook: Notebook): string[] {
  const count = (fit.snapshot.also ?? []).length + 1;
  if (count === notebook.also.length + 1) return measurementLabels([notebook.measurement, ...notebook.also]);
  return Array.from({ length: count }, (_, k) => `measurement ${k + 1}`);
}
