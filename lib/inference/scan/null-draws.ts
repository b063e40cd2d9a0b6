import type { Rng } from '@/lib/sampler';
import { choleskyInto, forwardSolve } from '../cholesky';
import { drawGamma } from '../gamma-draw';

/** One simulated measurement without a signal, in the metric of the real one (whitened by the real covariance). */
export interface NullDraw {
  /** Noise of the kept values. */
  readonly noise: Float64Array;
  /** Lower Cholesky factor (row-major) of the covariance as these mocks would have estimated it; null where it is known. */
  readonly metric: Float64Array | null;
}

export interface NullSource {
  /** Covariance of all values of the measurement, before cuts (rows × rows). */
  readonly covariance: Float64Array;
  readonly rows: number;
  /** Indices of the values that the cuts keep, ascending. */
  readonly kept: readonly number[];
  /** Number of mocks N behind the covariance; null where it is known. */
  readonly mocks: number | null;
}

/**
 * Draws nulls of a whole measurement and cuts them: noise N(0, C), and with mocks a covariance from N of them, (N − 1) S ~
 * Wishart(C, N − 1) by Bartlett's decomposition. The numbers depend on the two generators and on the number of rows alone, so that
 * scans with other cuts, ranges or templates of one measurement see the same nulls, one by one.
 */
export class NullDraws {
  private readonly all: Float64Array;
  private readonly noise: Float64Array;
  private readonly bartlett: Float64Array | null;
  private readonly metric: Float64Array | null;
  /** L_kept⁻¹ times the kept rows of L, or null where everything is kept. */
  private readonly map: Float64Array | null;
  private readonly mapped: Float64Array;

  constructor(
    private readonly source: NullSource,
    private readonly dataRng: Rng,
    private readonly mockRng: Rng,
  ) {
    const { rows, kept, mocks, covariance } = source;
    const p = kept.length;
    this.all = new Float64Array(rows);
    this.noise = new Float64Array(p);
    this.bartlett = mocks === null ? null : new Float64Array(rows * rows);
    this.metric = mocks === null ? null : new Float64Array(p * p);
    this.map = p === rows ? null : cutMap(covariance, rows, kept);
    this.mapped = new Float64Array(p * rows);
  }

  /** The next null; its arrays are overwritten by the one after. */
  next(): NullDraw {
    const { all, noise, map, dataRng, source } = this;
    const { rows } = source;
    for (let i = 0; i < rows; i += 1) all[i] = dataRng.normal();
    if (!map) noise.set(all);
    else {
      for (let i = 0; i < noise.length; i += 1) {
        let sum = 0;
        for (let j = 0; j < rows; j += 1) sum += map[i * rows + j] * all[j];
        noise[i] = sum;
      }
    }
    if (this.bartlett && this.metric && source.mocks !== null)
      this.drawMetric(this.bartlett, this.metric, source.mocks - 1);
    return { noise, metric: this.metric };
  }

  private drawMetric(a: Float64Array, metric: Float64Array, freedom: number): void {
    const { mockRng, map, mapped, source } = this;
    const { rows } = source;
    const scale = 1 / Math.sqrt(freedom);
    for (let i = 0; i < rows; i += 1) {
      for (let j = 0; j < i; j += 1) a[i * rows + j] = scale * mockRng.normal();
      a[i * rows + i] = scale * Math.sqrt(2 * drawGamma(mockRng, (freedom - i) / 2));
    }
    if (!map) {
      metric.set(a);
      return;
    }
    const p = source.kept.length;
    for (let i = 0; i < p; i += 1) {
      for (let j = 0; j < rows; j += 1) {
        let sum = 0;
        for (let k = j; k < rows; k += 1) sum += map[i * rows + k] * a[k * rows + j];
        mapped[i * rows + j] = sum;
      }
    }
    for (let i = 0; i < p; i += 1) {
      for (let j = 0; j <= i; j += 1) {
        let sum = 0;
        for (let k = 0; k < rows; k += 1) sum += mapped[i * rows + k] * mapped[j * rows + k];
        metric[i * p + j] = sum;
      }
    }
    choleskyInto(metric, p, metric);
  }
}

function cutMap(covariance: Float64Array, rows: number, kept: readonly number[]): Float64Array {
  const p = kept.length;
  const whole = Float64Array.from(covariance);
  choleskyInto(whole, rows, whole);
  const part = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < p; j += 1) part[i * p + j] = covariance[kept[i] * rows + kept[j]];
  }
  choleskyInto(part, p, part);
  const map = new Float64Array(p * rows);
  const column = new Float64Array(p);
  for (let j = 0; j < rows; j += 1) {
    for (let i = 0; i < p; i += 1) column[i] = j <= kept[i] ? whole[kept[i] * rows + j] : 0;
    forwardSolve(part, p, column);
    for (let i = 0; i < p; i += 1) map[i * rows + j] = column[i];
  }
  return map;
}
