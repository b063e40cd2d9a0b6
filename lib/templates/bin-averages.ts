import { TemplateError, quoteValue } from './errors';
import type { Axis } from './types';

/**
 * Means over bins in x = ln κ. For a bin [x_a, x_b] of width D and centre x_c, and weight κ^q d ln κ,
 *
 *   ⟨κ^p e^{iμ ln κ}⟩_q = e^{(p+iμ) x_c} shc((p + q + iμ) D/2) / shc(q D/2),   shc(z) = sinh(z)/z.
 *
 * This is the exact mean, and the ratio of hyperbolic sines doesn't lose digits in narrow bins as the difference of
 * two exponentials would. Derived by us.
 */

/** (2k)(2k+1) for k = 5 … 1: shc's series from the inside out. */
const SHC_DIVISORS = [110, 72, 42, 20, 6] as const;

/** The exact ratio shc(a + ib)/shc(w), w real, into `out`; scaled by exponentials so that no bin is too wide for it. */
function ratioOfShc(a: number, b: number, w: number, out: Float64Array): void {
  const numeratorScale = Math.abs(a);
  const denominatorScale = Math.abs(w);
  let re: number;
  let im: number;
  const square = a * a + b * b;
  if (square < 0.01) {
    // At and near 0: shc(z) = 1 + u/6 (1 + u/20 (1 + u/42 (…))), u = z²; error below 1e-15 for |z| < 0.3.
    const ure = a * a - b * b;
    const uim = 2 * a * b;
    re = 1;
    im = 0;
    for (let k = 0; k < SHC_DIVISORS.length; k += 1) {
      const nextRe = 1 + (ure * re - uim * im) / SHC_DIVISORS[k];
      im = (ure * im + uim * re) / SHC_DIVISORS[k];
      re = nextRe;
    }
    const scale = Math.exp(-numeratorScale);
    re *= scale;
    im *= scale;
  } else {
    const decay = Math.exp(-2 * numeratorScale);
    const sinhScaled = (-Math.sign(a) * Math.expm1(-2 * numeratorScale)) / 2;
    const sinhRe = sinhScaled * Math.cos(b);
    const sinhIm = ((1 + decay) / 2) * Math.sin(b);
    re = (sinhRe * a + sinhIm * b) / square;
    im = (sinhIm * a - sinhRe * b) / square;
  }
  const denominator = w === 0 ? 1 : -Math.expm1(-2 * denominatorScale) / (2 * denominatorScale);
  const scale = Math.exp(numeratorScale - denominatorScale) / denominator;
  out[0] = re * scale;
  out[1] = im * scale;
}

/**
 * Refuses an axis that is empty, of unequal lengths, or not positive, finite and increasing within each bin.
 * Throws TemplateError `invalid_axis` naming the entry, counted from 0.
 */
export function validateAxis(axis: Axis): void {
  const fail = (path: string, message: string): never => {
    throw new TemplateError('invalid_axis', path, message);
  };
  if (axis.kind === 'points') {
    if (axis.kappa.length === 0) fail('axis.kappa', 'there are no points; give at least one kappa');
    axis.kappa.forEach((kappa, i) => {
      if (!(kappa > 0 && kappa < Infinity)) {
        fail(`axis.kappa[${i}]`, `kappa = ${quoteValue(kappa)} is not a finite number above 0`);
      }
    });
    return;
  }
  if (axis.lo.length === 0) fail('axis.lo', 'there are no bins; give at least one');
  if (axis.lo.length !== axis.hi.length) {
    fail('axis.hi', `${axis.hi.length} upper edges for ${axis.lo.length} lower edges; give as many of both`);
  }
  if (!Number.isFinite(axis.weightPower)) {
    fail(
      'axis.weightPower',
      `${quoteValue(axis.weightPower)} is not a finite number; 0 is uniform in ln kappa`,
    );
  }
  axis.lo.forEach((lo, i) => {
    if (!(lo > 0 && lo < axis.hi[i] && axis.hi[i] < Infinity)) {
      fail(`axis.lo[${i}]`, `bin [${lo}, ${axis.hi[i]}] is not one with 0 < lower edge < upper edge`);
    }
  });
}

/** Centres and widths in ln κ. Points have width 0, for which every mean is the value itself. */
interface LogBins {
  centre: Float64Array;
  width: Float64Array;
  weightPower: number;
}

function logBins(axis: Axis): LogBins {
  if (axis.kind === 'points') {
    return { centre: axis.kappa.map(Math.log), width: new Float64Array(axis.kappa.length), weightPower: 0 };
  }
  // log1p keeps the width of a narrow bin, which the difference of two logarithms would lose.
  const width = axis.lo.map((lo, i) => Math.log1p((axis.hi[i] - lo) / lo));
  const centre = axis.lo.map((lo, i) => Math.log(lo) + 0.5 * width[i]);
  return { centre, width, weightPower: axis.weightPower };
}

/**
 * ⟨κ^p⟩ at every value of the axis, p any real; length of the axis, dimensionless. Exact to rounding.
 * The axis must have passed `validateAxis`.
 */
export function powerColumn(axis: Axis, p: number): Float64Array {
  const { centre, width, weightPower } = logBins(axis);
  const ratio = new Float64Array(2);
  return centre.map((x, i) => {
    ratioOfShc(0.5 * (p + weightPower) * width[i], 0, 0.5 * weightPower * width[i], ratio);
    return Math.exp(p * x) * ratio[0];
  });
}

/** The two columns of one oscillation as a function of μ. */
export interface OscillationColumns {
  readonly length: number;
  /** Writes ⟨κ^p cos(μ ln κ)⟩ into `out[0]` and ⟨κ^p sin(μ ln κ)⟩ into `out[1]`; no allocation. */
  fill(mu: number, out: Float64Array[]): void;
}

/**
 * The columns ⟨κ^p cos(μ ln κ)⟩ and ⟨κ^p sin(μ ln κ)⟩ on an axis, for any real μ; p = 1/2 for a heavy field.
 * Constants of the axis are computed once. Bins of equal width in ln κ share the average's factor, so that one call
 * costs one sine and one cosine a bin (two of each where all widths differ). Accuracy 1e-12 of the column's envelope
 * for |μ ln κ| ≤ 1000. The axis must have passed `validateAxis`.
 */
export function oscillationColumns(axis: Axis, p = 0.5): OscillationColumns {
  const { centre, width, weightPower } = logBins(axis);
  const n = centre.length;
  const envelope = centre.map((x) => Math.exp(p * x));
  // Widths that agree to the rounding of a logarithm are one width; 1e-14 changes an average by less than 1e-12.
  const groups = new Map<number, number>();
  const groupWidths: number[] = [];
  const groupOf = new Int32Array(n);
  for (let i = 0; i < n; i += 1) {
    const key = Math.round(width[i] / 1e-14);
    let group = groups.get(key);
    if (group === undefined) {
      group = groupWidths.length;
      groups.set(key, group);
      groupWidths.push(width[i]);
    }
    groupOf[i] = group;
  }
  const factors = new Float64Array(2 * groupWidths.length);
  const ratio = new Float64Array(2);
  return {
    length: n,
    fill(mu, out) {
      for (let k = 0; k < groupWidths.length; k += 1) {
        const half = 0.5 * groupWidths[k];
        ratioOfShc((p + weightPower) * half, mu * half, weightPower * half, ratio);
        factors[2 * k] = ratio[0];
        factors[2 * k + 1] = ratio[1];
      }
      const cosine = out[0];
      const sine = out[1];
      for (let i = 0; i < n; i += 1) {
        const angle = mu * centre[i];
        const c = envelope[i] * Math.cos(angle);
        const s = envelope[i] * Math.sin(angle);
        const re = factors[2 * groupOf[i]];
        const im = factors[2 * groupOf[i] + 1];
        cosine[i] = c * re - s * im;
        sine[i] = c * im + s * re;
      }
    },
  };
}
