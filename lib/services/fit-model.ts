import type { InferenceSpec } from '@/lib/inference';
import type { Snapshot } from '@/lib/schemas';
import type { MeasurementVersion, NotebookSettings } from '@/models';
import { inferenceSpec, type StoredNumbers } from './inference-spec';

export type { StoredNumbers } from './inference-spec';

/** All that a thread needs to build a fit's posterior anew. */
export interface FitModel {
  numbers: StoredNumbers;
  snapshot: Snapshot;
}

/** Those of a row; its fields are getters, which a spread would miss. */
export function storedNumbers(version: MeasurementVersion): StoredNumbers {
  const { rows, hasBinEdges, mockCount, points, covariance, theory } = version;
  return { rows, hasBinEdges, mockCount, points, covariance, theory };
}

export const fitModel = (numbers: StoredNumbers, snapshot: Snapshot): FitModel => ({ numbers, snapshot });

/** What a frozen snapshot says is to be inferred. Reads nothing but its arguments. */
export function specOf({ numbers, snapshot }: FitModel): InferenceSpec {
  const { cuts, likelihood, template, priors, also, sharedMocks } = snapshot;
  const settings: NotebookSettings = {
    cuts,
    likelihood,
    template,
    priors,
    ...(also
      ? { also: also.map((part) => ({ version: String(part.measurementVersion), cuts: part.cuts })) }
      : {}),
    ...(sharedMocks ? { sharedMocks } : {}),
  };
  return inferenceSpec(numbers, settings).spec;
}

/** The columns of a fit's draws: what is stored, and what is computed from it. */
export interface FitColumns {
  /** Sampled parameters, in the order in which they are stored. */
  sampled: string[];
  derived: string[];
  /** Values stored a draw: ln likelihood, ln prior, sampled parameters. */
  width: number;
  /** Writes the derived quantities of the draw that begins at `values[offset]` into `out`. */
  derive(values: ArrayLike<number>, offset: number, out: Float64Array): void;
}

/** Columns from the template and the priors alone: no posterior has to be built to read draws. */
export function fitColumns({ template, priors }: Pick<InferenceSpec, 'template' | 'priors'>): FitColumns {
  const full = new Float64Array(template.parameters.length);
  const free: number[] = [];
  template.parameters.forEach(({ name }, index) => {
    const prior = priors[name];
    if (prior.kind === 'fixed') full[index] = prior.value;
    else free.push(index);
  });
  return {
    sampled: free.map((index) => template.parameters[index].name),
    derived: template.derived.map(({ name }) => name),
    width: 2 + free.length,
    derive(values, offset, out) {
      for (let i = 0; i < free.length; i++) full[free[i]] = values[offset + 2 + i];
      for (let i = 0; i < template.derived.length; i++) out[i] = template.derived[i].evaluate(full);
    },
  };
}
