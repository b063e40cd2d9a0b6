import type { Prior } from '@/lib/templates';
import { assembleTemplate, type PartModel } from './assembled-template';
import { InferenceError } from './inference-error';
import type { FitData, InferenceSpec, LikelihoodKind } from './types';

/** One measurement of those that are fitted together: its numbers after the cuts, and how the theory makes them. */
export interface AssemblyPart extends Omit<PartModel, 'length'> {
  data: Pick<FitData, 'S' | 'covariance' | 'mockCount'>;
  /** Known covariance of what the theory leaves out, p × p row-major. */
  theoryCovariance?: Float64Array;
}

export interface Assembly {
  /** At least one. */
  parts: readonly AssemblyPart[];
  /**
   * The mocks of every part, N rows of its p values each (row-major), where row i of all of them is of one simulated sky: then the
   * covariance of the whole vector comes from them. Left out where the parts are independent.
   */
  sharedMocks?: readonly Float64Array[];
  template: { id: string; options: unknown };
  likelihood: LikelihoodKind;
  /** One prior for every parameter of `assembledParameters`, by name. */
  priors: Readonly<Record<string, Prior>>;
}

/**
 * The likelihood that is right where nobody chose one: the matched-prior t for one covariance from mocks, Sellentin–Heavens where several
 * measurements have their own, the normal one for known covariances. Beside a theory covariance the t forms don't hold: Hartlap's.
 */
export function likelihoodFor(
  parts: readonly { data: Pick<FitData, 'mockCount'>; theoryCovariance?: Float64Array }[],
  shared: boolean,
): LikelihoodKind {
  if (parts.every(({ data }) => data.mockCount === null) && !shared) return 'normal';
  if (parts.some(({ theoryCovariance }) => theoryCovariance)) return 'hartlap';
  return parts.length === 1 || shared ? 'matched-t' : 'sellentin-heavens';
}

/**
 * Makes one inference of one measurement or several: data one after the other, one template over all of them, one covariance. Pure. Throws
 * InferenceError at `parts[k]…`, `sharedMocks`, and TemplateError as `compileTemplate`; priors and covariance are checked where the
 * posterior is built.
 */
export function assemble({ parts, sharedMocks, template, likelihood, priors }: Assembly): InferenceSpec {
  const models = parts.map(({ label, axis, window: matrix, columns, data }) => ({
    label,
    axis,
    window: matrix,
    columns,
    length: data.S.length,
  }));
  return {
    data: assembleData(parts, sharedMocks),
    likelihood,
    template: assembleTemplate(models, template),
    priors,
  };
}

/** The data of several measurements one after the other, with the covariance of all. */
export function assembleData(
  parts: readonly Pick<AssemblyPart, 'data' | 'theoryCovariance'>[],
  sharedMocks?: readonly Float64Array[],
): FitData {
  const theory = parts.some(({ theoryCovariance }) => theoryCovariance)
    ? {
        theoryCovariance: blockDiagonal(
          parts,
          ({ theoryCovariance, data }) => theoryCovariance ?? new Float64Array(data.S.length ** 2),
          'theoryCovariance',
        ),
      }
    : {};
  if (parts.length === 1 && !sharedMocks) return { ...parts[0].data, ...theory };
  const S = Float64Array.from(parts.flatMap(({ data }) => Array.from(data.S)));
  if (sharedMocks) return { S, ...mockCovariance(parts, sharedMocks), ...theory };
  return {
    S,
    covariance: blockDiagonal(parts, ({ data }) => data.covariance, 'covariance'),
    mockCount: null,
    parts: parts.map(({ data }) => ({ length: data.S.length, mockCount: data.mockCount })),
    ...theory,
  };
}

function blockDiagonal<T extends Pick<AssemblyPart, 'data'>>(
  parts: readonly T[],
  block: (part: T) => Float64Array,
  name: string,
): Float64Array {
  const p = parts.reduce((sum, { data }) => sum + data.S.length, 0);
  const out = new Float64Array(p * p);
  let from = 0;
  parts.forEach((part, k) => {
    const { length } = part.data.S;
    const values = block(part);
    if (values.length !== length * length) {
      throw new InferenceError(
        'covariance_size',
        `parts[${k}].${name}`,
        `${values.length} numbers for ${length} data values, which need ${length} × ${length} = ${length * length}`,
        'cut covariance and data alike',
      );
    }
    for (let i = 0; i < length; i += 1) {
      out.set(values.subarray(i * length, (i + 1) * length), (from + i) * p + from);
    }
    from += length;
  });
  return out;
}

/** Sample covariance (divisor N − 1) of the joint vectors of the mocks: row i of every part belongs to one simulation. */
function mockCovariance(
  parts: readonly Pick<AssemblyPart, 'data'>[],
  mocks: readonly Float64Array[],
): Pick<FitData, 'covariance' | 'mockCount'> {
  const lengths = parts.map(({ data }) => data.S.length);
  const counts = lengths.map((length, k) => (mocks[k]?.length ?? 0) / length);
  const [count] = counts;
  if (
    mocks.length !== parts.length ||
    !Number.isInteger(count) ||
    counts.some((n) => n !== count) ||
    count < 2
  ) {
    throw new InferenceError(
      'covariance_size',
      'sharedMocks',
      `the measurements have ${counts.join(' and ')} mocks; those they share come as the same number of rows in each`,
      'give every measurement the mocks of the same simulations in the same order, or take the measurements as independent',
    );
  }
  const p = lengths.reduce((sum, length) => sum + length, 0);
  const centred = new Float64Array(p * count);
  let from = 0;
  mocks.forEach((rows, k) => {
    const length = lengths[k];
    for (let i = 0; i < length; i += 1) {
      let mean = 0;
      for (let n = 0; n < count; n += 1) mean += rows[n * length + i] / count;
      for (let n = 0; n < count; n += 1) centred[(from + i) * count + n] = rows[n * length + i] - mean;
    }
    from += length;
  });
  const covariance = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = 0;
      for (let n = 0; n < count; n += 1) sum += centred[i * count + n] * centred[j * count + n];
      covariance[i * p + j] = sum / (count - 1);
      covariance[j * p + i] = covariance[i * p + j];
    }
  }
  return { covariance, mockCount: count };
}
