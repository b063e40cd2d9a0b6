import { formatNumber } from './format';

/** A tick: where it stands, whether it has a label (major) or is only a short stroke. */
export interface Tick {
  value: number;
  label: string;
  major: boolean;
}

/** Steps of which an axis may be made, as factors of a power of ten. */
const stepFactors = [1, 2, 5, 10];

/**
 * Step and decimals of a linear axis: the smallest of 1, 2, 5 × 10ⁿ that gives at most `count` intervals.
 *
 * @param lo lower end, finite, in the axis' unit
 * @param hi upper end, above `lo`
 * @param count wished number of intervals, ≥ 1
 * @returns step > 0 and the decimals that its multiples need; step 1 where the ends don't span anything
 */
export function linearStep(lo: number, hi: number, count: number): { step: number; decimals: number } {
  const span = hi - lo;
  if (!(span > 0) || !Number.isFinite(span)) return { step: 1, decimals: 0 };
  const power = Math.floor(Math.log10(span / count));
  const unit = 10 ** power;
  const factor = stepFactors.find((f) => span / (f * unit) <= count * (1 + 1e-9)) ?? 10;
  return { step: factor * unit, decimals: Math.max(0, -power - (factor === 10 ? 1 : 0)) };
}

/**
 * Ticks of a linear axis: labels at multiples of 1, 2 or 5 × 10ⁿ, one short stroke half way between two labels where
 * half the step is again a round number.
 *
 * @param lo lower end; `hi` upper end, in the axis' unit
 * @param count wished number of intervals (4 to 6 on a wide screen)
 * @returns ticks in rising order, empty where `hi` isn't above `lo`
 */
export function linearTicks(lo: number, hi: number, count = 5): Tick[] {
  if (!(hi > lo)) return [];
  const { step, decimals } = linearStep(lo, hi, count);
  const half = step / 2;
  const first = Math.ceil(lo / half - 1e-9);
  const last = Math.floor(hi / half + 1e-9);
  const ticks: Tick[] = [];
  for (let i = first; i <= last; i++) {
    const value = i * half;
    if (i % 2 === 0) ticks.push({ value, label: formatNumber(value, decimals), major: true });
    else ticks.push({ value, label: '', major: false });
  }
  return ticks;
}

/** Leading digits that carry labels, in the order in which they are tried: the first that gives few enough, yet three. */
const labelled = [[1, 3], [1, 2, 5], [1, 2, 3, 4, 5, 6, 7, 8, 9], [1]];

/** A power-of-ten multiple without the noise of binary division: 0.003, not 0.0030000000000000005. */
function decimal(mantissa: number, power: number): number {
  return Number(`${mantissa}e${power}`);
}

/**
 * Ticks of a logarithmic axis: labels at 1 and 3 times powers of ten (1, 2, 5 or all where there
 * would be fewer than three, 1 alone where there would be too many), short strokes at the other
 * whole multiples. Ends that are themselves such numbers are labelled.
 *
 * @param lo lower end > 0; `hi` upper end > `lo`, in the axis' unit
 * @param wished number of labels wished, 4 to 6 on a wide screen
 * @returns ticks in rising order, empty where the ends are no such interval
 */
export function logTicks(lo: number, hi: number, wished = 5): Tick[] {
  if (!(lo > 0) || !(hi > lo)) return [];
  const from = Math.floor(Math.log10(lo));
  const to = Math.ceil(Math.log10(hi));
  const inside = (v: number) => v >= lo * (1 - 1e-9) && v <= hi * (1 + 1e-9);
  const count = (mantissas: number[]) => {
    let n = 0;
    for (let p = from; p <= to; p++) for (const m of mantissas) if (inside(decimal(m, p))) n++;
    return n;
  };
  const mantissas = labelled.find((m) => count(m) >= 3 && count(m) <= wished + 1) ?? [1];
  const ticks: Tick[] = [];
  for (let p = from; p <= to; p++)
    for (let m = 1; m < 10; m++) {
      const value = decimal(m, p);
      if (!inside(value)) continue;
      const major = mantissas.includes(m);
      ticks.push({ value, label: major ? formatPower(value, p) : '', major });
    }
  return ticks;
}

/** Plain decimals from 0.001 to 9 999, powers of ten beyond. */
function formatPower(value: number, power: number): string {
  if (power >= -3 && power <= 3) return formatNumber(value, Math.max(0, -power));
  return value.toExponential(0).replace('e+', 'e').replace('-', '−');
}

/**
 * Interval that holds the given values with room at both ends, widened to round numbers.
 *
 * @param values any numbers; those that aren't finite are passed over
 * @param room share of the span left free at each end
 * @returns [lo, hi] with lo < hi; [−1, 1] where nothing is finite
 */
export function paddedDomain(values: Iterable<number>, room = 0.06): [number, number] {
  let lo = Infinity;
  let hi = -Infinity;
  for (const v of values)
    if (Number.isFinite(v)) {
      if (v < lo) lo = v;
      if (v > hi) hi = v;
    }
  if (lo > hi) return [-1, 1];
  const pad = hi > lo ? (hi - lo) * room : Math.abs(hi) * 0.1 || 1;
  const { step } = linearStep(lo - pad, hi + pad, 10);
  return [Math.floor((lo - pad) / step) * step, Math.ceil((hi + pad) / step) * step];
}
