import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import {
  linearReference,
  drawCoefficient,
  isExactReference,
  lnPriorOverReference,
  lnCoefficientDensity,
  type LinearReference,
} from './linear-reference';
import { reachOf } from './compressed';
import { newFieldMoments, type FieldMoments } from './field-moments';
import type { FieldSystem } from './field-system';
import type { ParameterLayout } from './parameter-layout';
import type { WhitenedField } from './whitened-field';
import type { WhitenedData } from './whitening';
import type { Rng } from '@/lib/sampler';

/**
 * The linear-Gaussian part of a posterior. Under a normal likelihood with weight λ (χ² → λ χ²) and the normal references
 * of the background coefficients, the background is integrated out once:
 *
 *     P_B = λ BᵀB + D_B⁻¹ = L_B L_Bᵀ,   v = L_B⁻¹ (λ Bᵀd + D_B⁻¹ m_B),   V_f = L_B⁻¹ λ Bᵀ X_f
 *
 * which leaves for the columns X of the fields the Gram matrix λ XᵀX − VᵀV and the vector λ Xᵀd − Vᵀv. What depends on one
 * mass alone is kept as `FieldMoments`; for a pair of masses only the cross products remain. Fixed background
 * coefficients are subtracted from the data. λ = 1 is the normal likelihood, h the Hartlap one; for the t forms it is the
 * scale of the normal that stands in for them.
 */
export class LinearModel {
  /** Number of sampled background coefficients. */
  readonly count: number;
  /** Parameter index of each; those drawn first, before the fields, stand last. */
  readonly indices: readonly number[];
  /** How many are drawn first. */
  readonly first: number;
  readonly weight: number;
  /** λ dᵀd + m_BᵀD_B⁻¹m_B − vᵀv. */
  readonly baseQuadratic: number;
  /** ln |P_B| + ln |D_B|. */
  readonly baseLogDeterminant: number;
  /** Constant of the log evidence: −½ (p ln 2π + ln |C| − p ln λ). */
  readonly constant: number;
  /** What the background drawn first has of |v|² and of ln |P_B|. */
  readonly firstQuadratic: number;
  readonly firstLogDeterminant: number;
  private readonly p: number;
  private readonly data: Float64Array;
  private readonly columns: Float64Array;
  /** Coordinates after which data and background are zero. */
  private readonly reach: number;
  private readonly factor: Float64Array;
  private readonly v: Float64Array;
  private readonly references: readonly LinearReference[];
  private readonly rest: Float64Array;
  private readonly stores: { masses: Float64Array; moments: FieldMoments[]; next: number }[];

  constructor(
    layout: ParameterLayout,
    whitening: WhitenedData,
    readonly fields: readonly WhitenedField[],
    background: Float64Array,
    weight: number,
    private readonly tail: { exponent: number; spread: number } | null = null,
    boundedFirst = false,
  ) {
    const p = whitening.data.length;
    this.p = p;
    this.weight = weight;
    this.data = Float64Array.from(whitening.data);
    const free: number[] = [];
    layout.background.forEach((index, j) => {
      if (layout.position[index] >= 0) free.push(j);
      else for (let i = 0; i < p; i += 1) this.data[i] -= layout.base[index] * background[j * p + i];
    });
    const isFirst = (j: number): boolean =>
      boundedFirst && !isExactReference(layout.priors[layout.background[j]]);
    free.sort((a, b) => Number(isFirst(a)) - Number(isFirst(b)));
    this.first = free.filter(isFirst).length;
    this.count = free.length;
    this.indices = free.map((j) => layout.background[j]);
    this.references = this.indices.map((index) => linearReference(layout.priors[index]));
    this.columns = new Float64Array(this.count * p);
    free.forEach((j, k) => this.columns.set(background.subarray(j * p, (j + 1) * p), k * p));

    this.reach = reachOf(this.data, this.columns);

    const n = this.count;
    const precision = new Float64Array(n * n);
    this.v = new Float64Array(n);
    let quadratic = weight * dotProduct(this.data, 0, this.data, 0, p);
    let logPrior = 0;
    for (let i = 0; i < n; i += 1) {
      const { mean, precision: own } = this.references[i];
      for (let j = 0; j <= i; j += 1) {
        precision[i * n + j] =
          weight * dotProduct(this.columns, i * p, this.columns, j * p, p) + (i === j ? own : 0);
      }
      this.v[i] = weight * dotProduct(this.columns, i * p, this.data, 0, p) + own * mean;
      quadratic += own * mean * mean;
      logPrior -= Math.log(own);
    }
    choleskyInto(precision, n, precision);
    this.factor = precision;
    forwardSolve(this.factor, n, this.v);
    this.baseQuadratic = quadratic - dotProduct(this.v, 0, this.v, 0, n);
    this.baseLogDeterminant = logDeterminant(this.factor, n) + logPrior;
    let firstQuadratic = 0;
    let firstLogDeterminant = 0;
    for (let k = n - this.first; k < n; k += 1) {
      firstQuadratic += this.v[k] * this.v[k];
      firstLogDeterminant += 2 * Math.log(this.factor[k * n + k]);
    }
    this.firstQuadratic = firstQuadratic;
    this.firstLogDeterminant = firstLogDeterminant;
    this.constant = -0.5 * (whitening.length * Math.log((2 * Math.PI) / weight) + whitening.logDeterminant);
    this.rest = new Float64Array(n);
    this.stores = fields.map(() => ({
      masses: new Float64Array(STORE).fill(NaN),
      moments: Array.from({ length: STORE }, () => newFieldMoments(n, p)),
      next: 0,
    }));
  }

  /**
   * ln evidence from what the fields add to the base: `quadratic` is the fields' part of the minimum of λχ² + prior
   * (≤ 0), `logDeterminant` their ln |P| + ln |D|. With a `tail` the quadratic form enters as in the t likelihood,
   * −(m/2) ln(1 + Q/(λ(N − 1))), so that masses far from the best keep their weight; then it is up to a constant.
   */
  logEvidence(quadratic: number, logDeterminantOfFields: number): number {
    const half = -0.5 * (this.baseLogDeterminant + logDeterminantOfFields);
    const total = this.baseQuadratic + quadratic;
    if (!this.tail) return this.constant + half - 0.5 * total;
    return (
      half - 0.5 * this.tail.exponent * Math.log1p(Math.max(0, total) / (this.weight * this.tail.spread))
    );
  }

  /** The moments of one field at a mass; overwritten by later calls at `STORE` other masses. No allocation. */
  moments(field: number, mass: number): FieldMoments {
    const store = this.stores[field];
    for (let i = 0; i < STORE; i += 1) if (store.masses[i] === mass) return store.moments[i];
    const slot = store.next;
    store.next = (slot + 1) % STORE;
    this.fillMoments(field, mass, store.moments[slot]);
    store.masses[slot] = mass;
    return store.moments[slot];
  }

  /** Moments of a field in an array of their own, for grids. */
  freshMoments(field: number, mass: number): FieldMoments {
    const moments = newFieldMoments(this.count, this.p);
    this.fillMoments(field, mass, moments);
    return moments;
  }

  private fillMoments(field: number, mass: number, out: FieldMoments): void {
    const { p, count: n, weight } = this;
    out.mass = mass;
    out.unitKnown = false;
    const { columns: x, v } = out;
    const columns = this.fields[field].at(mass);
    for (let i = 0; i < x.length; i += 1) x[i] = columns[i];
    const { columns: background, data, reach } = this;
    for (let k = 0; k < n; k += 1) {
      let c = 0;
      let s = 0;
      for (let i = 0, at = k * p; i < reach; i += 1, at += 1) {
        c += background[at] * x[i];
        s += background[at] * x[p + i];
      }
      v[k] = weight * c;
      v[n + k] = weight * s;
    }
    forwardSolve(this.factor, n, v);
    forwardSolve(this.factor, n, v, n);
    // Sums side by side, so that none waits for its own last addition.
    let cc = 0;
    let cs = 0;
    let ss = 0;
    for (let i = 0; i < p; i += 1) {
      const xc = x[i];
      const xs = x[p + i];
      cc += xc * xc;
      cs += xc * xs;
      ss += xs * xs;
    }
    let dc = 0;
    let ds = 0;
    for (let i = 0; i < reach; i += 1) {
      dc += x[i] * data[i];
      ds += x[p + i] * data[i];
    }
    out.linear[0] = weight * dc - dotProduct(v, 0, this.v, 0, n);
    out.linear[1] = weight * ds - dotProduct(v, n, this.v, 0, n);
    out.gram[0] = weight * cc - dotProduct(v, 0, v, 0, n);
    out.gram[1] = weight * cs - dotProduct(v, 0, v, n, n);
    out.gram[2] = weight * ss - dotProduct(v, n, v, n, n);
  }

  /** The 2 × 2 cross Gram matrix of two fields' columns (row: column of `a`), into `out[0 … 3]`. */
  cross(a: FieldMoments, b: FieldMoments, out: Float64Array): void {
    const { p, count: n, weight } = this;
    let cc = 0;
    let cs = 0;
    let sc = 0;
    let ss = 0;
    const x = a.columns;
    const y = b.columns;
    for (let i = 0; i < p; i += 1) {
      const xc = x[i];
      const xs = x[p + i];
      const yc = y[i];
      const ys = y[p + i];
      cc += xc * yc;
      cs += xc * ys;
      sc += xs * yc;
      ss += xs * ys;
    }
    out[0] = weight * cc - dotProduct(a.v, 0, b.v, 0, n);
    out[1] = weight * cs - dotProduct(a.v, 0, b.v, n, n);
    out[2] = weight * sc - dotProduct(a.v, n, b.v, 0, n);
    out[3] = weight * ss - dotProduct(a.v, n, b.v, n, n);
  }

  /** Draws the background given the fields' coefficients (two a field), into the full vector. */
  drawBackground(
    rng: Rng,
    moments: readonly FieldMoments[],
    coefficients: Float64Array,
    full: Float64Array,
  ): void {
    this.settleRest(moments, coefficients);
    const n = this.count;
    for (let j = n - 1 - this.first; j >= 0; j -= 1) {
      const { precision, linear } = this.conditional(j, full);
      full[this.indices[j]] = drawCoefficient(rng, this.references[j], precision, linear);
    }
  }

  /** ln density of the background in `full` under `drawBackground`. */
  lnBackgroundDensity(
    moments: readonly FieldMoments[],
    coefficients: Float64Array,
    full: Float64Array,
  ): number {
    this.settleRest(moments, coefficients);
    let sum = 0;
    for (let j = this.count - 1 - this.first; j >= 0; j -= 1) {
      const { precision, linear } = this.conditional(j, full);
      sum += lnCoefficientDensity(full[this.indices[j]], this.references[j], precision, linear);
    }
    return sum;
  }

  /**
   * The normal equations of the fields' coefficients and, behind them, of the background drawn first, the rest of the background
   * integrated out: `out` row-major (lower triangle), `linear` the right-hand side. The fields have no reference in it yet.
   */
  joinFirst(
    { size, gram, linear: own, moments }: Pick<FieldSystem, 'size' | 'gram' | 'linear' | 'moments'>,
    out: Float64Array,
    linear: Float64Array,
  ): void {
    const { count: n, first, factor, v } = this;
    const total = size + first;
    const from = n - first;
    for (let i = 0; i < size; i += 1) {
      const vi = moments[i >> 1].v;
      const io = (i & 1) * n;
      for (let j = 0; j <= i; j += 1) {
        const vj = moments[j >> 1].v;
        const jo = (j & 1) * n;
        let sum = gram[i * size + j];
        for (let k = from; k < n; k += 1) sum += vi[io + k] * vj[jo + k];
        out[i * total + j] = sum;
      }
      let sum = own[i];
      for (let k = from; k < n; k += 1) sum += vi[io + k] * v[k];
      linear[i] = sum;
    }
    for (let i = from; i < n; i += 1) {
      const row = (size + i - from) * total;
      for (let j = 0; j < size; j += 1) {
        const vj = moments[j >> 1].v;
        const jo = (j & 1) * n;
        let sum = 0;
        for (let k = from; k <= i; k += 1) sum += factor[i * n + k] * vj[jo + k];
        out[row + j] = sum;
      }
      for (let j = from; j <= i; j += 1) {
        let sum = 0;
        for (let k = from; k <= j; k += 1) sum += factor[i * n + k] * factor[j * n + k];
        out[row + size + j - from] = sum;
      }
      let sum = 0;
      for (let k = from; k <= i; k += 1) sum += factor[i * n + k] * v[k];
      linear[size + i - from] = sum;
    }
  }

  /** Draws the background that comes before the fields, from the factorised system of `joinFirst` (size × size) and its solved right-hand side. */
  drawFirst(rng: Rng, factor: Float64Array, rest: Float64Array, full: Float64Array): void {
    for (let k = this.first - 1; k >= 0; k -= 1) {
      const { precision, linear } = this.conditionalFirst(k, factor, rest, full);
      const j = this.count - this.first + k;
      full[this.indices[j]] = drawCoefficient(rng, this.references[j], precision, linear);
    }
  }

  /** ln density of `drawFirst` giving what stands in `full`. */
  lnFirstDensity(factor: Float64Array, rest: Float64Array, full: Float64Array): number {
    let sum = 0;
    for (let k = this.first - 1; k >= 0; k -= 1) {
      const { precision, linear } = this.conditionalFirst(k, factor, rest, full);
      const j = this.count - this.first + k;
      sum += lnCoefficientDensity(full[this.indices[j]], this.references[j], precision, linear);
    }
    return sum;
  }

  /**
   * ln of what the priors of the background drawn first make of its integral, relative to their references, up to a constant; each
   * coefficient with those after it at their `mean`.
   */
  firstCorrection(factor: Float64Array, rest: Float64Array, mean: Float64Array): number {
    const n = rest.length;
    let sum = 0;
    for (let at = n - this.first; at < n; at += 1) {
      const diagonal = factor[at * n + at];
      const precision = diagonal * diagonal;
      // The mean of the conditional at the means of the later ones is the mean itself.
      sum += lnPriorOverReference(this.references[this.count - n + at], precision, precision * mean[at]);
    }
    return sum;
  }

  private conditionalFirst(
    k: number,
    factor: Float64Array,
    solved: Float64Array,
    full: Float64Array,
  ): { precision: number; linear: number } {
    const n = solved.length;
    const at = n - this.first + k;
    const diagonal = factor[at * n + at];
    let rest = solved[at];
    for (let i = at + 1; i < n; i += 1) {
      rest -= factor[i * n + at] * full[this.indices[this.count - n + i]];
    }
    this.pair.precision = diagonal * diagonal;
    this.pair.linear = diagonal * rest;
    return this.pair;
  }

  /** v − Σ_f V_f c_f: what is left of the data for the background. */
  private settleRest(moments: readonly FieldMoments[], coefficients: Float64Array): void {
    const n = this.count;
    this.rest.set(this.v);
    for (let f = 0; f < moments.length; f += 1) {
      const { v } = moments[f];
      const a = coefficients[2 * f];
      const b = coefficients[2 * f + 1];
      for (let k = 0; k < n; k += 1) this.rest[k] -= a * v[k] + b * v[n + k];
    }
  }

  private readonly pair = { precision: 0, linear: 0 };

  /** Conditional of coefficient j given those after it, with those before it integrated out. */
  private conditional(j: number, full: Float64Array): { precision: number; linear: number } {
    const n = this.count;
    const diagonal = this.factor[j * n + j];
    let rest = this.rest[j];
    for (let i = j + 1; i < n; i += 1) rest -= this.factor[i * n + j] * full[this.indices[i]];
    this.pair.precision = diagonal * diagonal;
    this.pair.linear = diagonal * rest;
    return this.pair;
  }
}

const STORE = 8;

function dotProduct(a: Float64Array, from: number, b: Float64Array, at: number, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i += 1) sum += a[from + i] * b[at + i];
  return sum;
}
