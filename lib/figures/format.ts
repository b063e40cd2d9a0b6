/** Thin no-break space, between groups of thousands and before a per cent sign. */
export const thinSpace = '\u202f';
/** The true minus sign. */
export const minus = '\u2212';
/** No-break space, which has a digit's width in a monospaced face. */
const padding = '\u00a0';
/** Stands where a value doesn't apply or isn't known. */
export const noValue = '–';

/** Thousands apart from 1 000 on; digits after the point are left alone. */
function grouped(digits: string): string {
  return digits.replace(/\B(?=(\d{3})+$)/g, thinSpace);
}

/**
 * A number with fixed decimals, true minus and thin spaces: −2.75, 12 400. Negative decimals round to tens, hundreds, …
 *
 * @param value any number, in the unit that the column's head names
 * @param decimals digits after the point, −15 to 15
 * @returns a dash where the number isn't finite; never "−0"
 */
export function formatNumber(value: number, decimals: number): string {
  if (Number.isNaN(value)) return noValue;
  if (!Number.isFinite(value)) return value > 0 ? '∞' : `${minus}∞`;
  const scale = 10 ** Math.max(0, -decimals);
  const fixed = (Math.round(Math.abs(value) / scale) * scale).toFixed(0);
  const text = decimals < 0 ? fixed : Math.abs(value).toFixed(decimals);
  const [whole, fraction] = text.split('.');
  const sign = value < 0 && Number(text) !== 0 ? minus : '';
  return sign + grouped(whole) + (fraction === undefined ? '' : `.${fraction}`);
}

/** A whole number with thin spaces: 12 400. */
export function formatCount(value: number): string {
  return formatNumber(value, 0);
}

/**
 * Decimals that a Monte Carlo standard error allows: the last digit shown is worth at least twice the error.
 *
 * @param mcse the error, in the unit of the value
 * @returns digits after the point, −15 to 6; negative where tens are all that is known; 6 where the error is 0
 */
export function decimalsByMcse(mcse: number): number {
  if (!(mcse > 0)) return 6;
  return Math.max(-15, Math.min(6, Math.floor(-Math.log10(2 * mcse) + 1e-9)));
}

/**
 * A value with the digits that its Monte Carlo standard error allows; a dash where value or error is unknown.
 *
 * @param value in any unit; `mcse` in the same
 */
export function formatByMcse(value: number, mcse: number): string {
  if (!Number.isFinite(value) || !Number.isFinite(mcse)) return noValue;
  return formatNumber(value, decimalsByMcse(mcse));
}

/** "lo to hi" with equal decimals, each end padded on the left to `width` characters (for a monospaced column). */
export function formatInterval(lo: number, hi: number, decimals: number, width = 0): string {
  return `${formatNumber(lo, decimals).padStart(width, padding)} to ${formatNumber(hi, decimals).padStart(width, padding)}`;
}

/**
 * A column of intervals whose ends stand under each other: every end is padded to the longest of the column.
 *
 * @param rows ends and decimals of each row
 * @returns one text a row, in order
 */
export function formatIntervals(rows: readonly { lo: number; hi: number; decimals: number }[]): string[] {
  const length = (v: number, d: number) => formatNumber(v, d).length;
  const width = Math.max(0, ...rows.flatMap((r) => [length(r.lo, r.decimals), length(r.hi, r.decimals)]));
  return rows.map((r) => formatInterval(r.lo, r.hi, r.decimals, width));
}

/** A share as per cent with a thin space: 68 %. */
export function formatPercent(share: number, decimals = 0): string {
  return `${formatNumber(share * 100, decimals)}${thinSpace}%`;
}

/**
 * Decimals of a number that is moved over a span: two, more where the span is below a tenth, none from 1 000 on.
 *
 * @param lo one end; `hi` the other, in one unit
 * @returns 0 to 6
 */
export function decimalsForSpan(lo: number, hi: number): number {
  const span = Math.abs(hi - lo);
  if (!(span > 0) || !Number.isFinite(span)) return 2;
  if (span >= 1000) return 0;
  return Math.max(2, Math.min(6, 2 - Math.ceil(Math.log10(span) - 1e-9)));
}

/**
 * Reads a number as people write it: either minus sign, thin, no-break or plain spaces between thousands, exponent.
 *
 * @returns the number, or null where the text is none (empty text too)
 */
export function parseNumber(text: string): number | null {
  const plain = text.replace(/[\u2212\u2013]/g, '-').replace(/[\s\u00a0\u202f\u2009]/g, '');
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(plain)) return null;
  const value = Number(plain);
  return Number.isFinite(value) ? value : null;
}
