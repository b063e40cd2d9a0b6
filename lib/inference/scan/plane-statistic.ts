import type { NullStatistics } from './null-statistics';

/**
 * Fall of χ² with two fields, at every pair of places i < j. Free columns: that of i's, then of what j's add beside them. One
 * column each with coefficients of one sign (g w_1, g w_2 ≥ 0 or both ≤ 0): the pair's where its coefficients agree in sign, else
 * the better one alone.
 */
export class PlaneStatistic {
  /** For known covariances: cross products and the inverse factor of every pair, computed once. */
  private readonly kept: Float64Array | null;
  private readonly stride: number;
  private readonly along: Float64Array;
  private readonly frames: Float64Array[];

  constructor(
    private readonly statistics: NullStatistics,
    private readonly sameSign: boolean,
    drawn: boolean,
  ) {
    const { size, columns: q, dimensions } = statistics;
    this.stride = q === 1 ? 1 : 7;
    this.along = new Float64Array(size * q);
    this.frames = Array.from({ length: size }, () => new Float64Array(q * dimensions));
    this.kept = null;
    if (drawn) return;
    const kept = new Float64Array(((size * (size - 1)) / 2) * this.stride);
    for (let i = 0; i < size; i += 1) this.frames[i].set(statistics.frame(i));
    let at = 0;
    for (let i = 0; i < size; i += 1) {
      for (let j = i + 1; j < size; j += 1) {
        this.relate(i, j, kept, at);
        at += this.stride;
      }
    }
    this.kept = kept;
  }

  /** The largest fall over all pairs for the null that the statistics hold; `out`, where given, takes every pair's. */
  largest(out?: Float64Array): number {
    const { statistics, along, frames, kept, stride, sameSign } = this;
    const { size, columns: q, dimensions: n } = statistics;
    const y = statistics.projected;
    for (let i = 0; i < size; i += 1) {
      const frame = statistics.frame(i);
      if (!kept) frames[i].set(frame);
      for (let c = 0; c < q; c += 1) {
        let sum = 0;
        for (let k = 0; k < n; k += 1) sum += frame[c * n + k] * y[k];
        along[i * q + c] = sum;
      }
    }
    const relation = kept ?? new Float64Array(stride);
    let best = 0;
    let at = 0;
    let pair = 0;
    for (let i = 0; i < size; i += 1) {
      for (let j = i + 1; j < size; j += 1) {
        if (!kept) this.relate(i, j, relation, 0);
        const gain = q === 1 ? this.ofOne(i, j, relation[at], sameSign) : this.ofTwo(i, j, relation, at);
        if (gain > best) best = gain;
        if (out) out[pair] = gain;
        pair += 1;
        if (kept) at += stride;
      }
    }
    return best;
  }

  private ofOne(i: number, j: number, overlap: number, sameSign: boolean): number {
    const { along } = this;
    const [a, b] = [along[i], along[j]];
    const left = 1 - overlap * overlap;
    if (!(left > 1e-9)) return Math.max(a * a, b * b);
    // Signs of the coefficients of the columns as they are: the frames have positive lengths.
    if (sameSign && (a - overlap * b) * (b - overlap * a) < 0) return Math.max(a * a, b * b);
    return (a * a + b * b - 2 * overlap * a * b) / left;
  }

  private ofTwo(i: number, j: number, relation: Float64Array, at: number): number {
    const { along } = this;
    const a0 = along[2 * i];
    const a1 = along[2 * i + 1];
    const d0 = along[2 * j] - relation[at] * a0 - relation[at + 2] * a1;
    const d1 = along[2 * j + 1] - relation[at + 1] * a0 - relation[at + 3] * a1;
    const u = relation[at + 4] * d0;
    const v = relation[at + 5] * d0 + relation[at + 6] * d1;
    return a0 * a0 + a1 * a1 + u * u + v * v;
  }

  /** Cross products C of two frames and, for two columns, the inverse Cholesky factor of 1 − CᵀC. */
  private relate(i: number, j: number, out: Float64Array, at: number): void {
    const { columns: q, dimensions: n } = this.statistics;
    const [a, b] = [this.frames[i], this.frames[j]];
    for (let c = 0; c < q; c += 1) {
      for (let d = 0; d < q; d += 1) {
        let sum = 0;
        for (let k = 0; k < n; k += 1) sum += a[c * n + k] * b[d * n + k];
        out[at + c * q + d] = sum;
      }
    }
    if (q === 1) return;
    const [c00, c01, c10, c11] = [out[at], out[at + 1], out[at + 2], out[at + 3]];
    const m00 = 1 - c00 * c00 - c10 * c10;
    const m01 = -c00 * c01 - c10 * c11;
    const m11 = 1 - c01 * c01 - c11 * c11;
    const l00 = m00 > 1e-8 ? Math.sqrt(m00) : 0;
    const l10 = l00 > 0 ? m01 / l00 : 0;
    const rest = m11 - l10 * l10;
    const l11 = rest > 1e-8 ? Math.sqrt(rest) : 0;
    out[at + 4] = l00 > 0 ? 1 / l00 : 0;
    out[at + 5] = l00 > 0 && l11 > 0 ? -l10 / (l00 * l11) : 0;
    out[at + 6] = l11 > 0 ? 1 / l11 : 0;
  }
}
