import { formatCount, formatNumber, thinSpace } from '@/lib/figures/format';

const small = ['no', 'one', 'two', 'three', 'four', 'five', 'six', 'seven', 'eight', 'nine', 'ten'];

/** A count inside a sentence: in words up to ten, with thin spaces from then on. */
export function inWords(count: number): string {
  return small[count] ?? formatCount(count);
}

export const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** "one bin", "40 bins"; the plural adds s unless it is given. */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${inWords(count)} ${count === 1 ? one : many}`;
}

/** "a, b and c" */
export function listed(parts: readonly string[]): string {
  if (parts.length < 2) return parts.join('');
  return `${parts.slice(0, -1).join(', ')} and ${parts[parts.length - 1]}`;
}

/** A number with the figures that matter, without zeros at its end: 0.3, 0.00337, 12. */
export function plain(value: number, figures = 4): string {
  if (value === 0 || !Number.isFinite(value)) return formatNumber(value, 0);
  const rounded = Number(value.toPrecision(figures));
  const magnitude = Math.abs(rounded);
  if (magnitude >= 1e6 || magnitude < 1e-4) return powerOfTen(rounded);
  const decimals = (String(rounded).split('.')[1] ?? '').length;
  return formatNumber(rounded, decimals);
}

const raised: Record<string, string> = {
  '-': '⁻',
  '0': '⁰',
  '1': '¹',
  '2': '²',
  '3': '³',
  '4': '⁴',
  '5': '⁵',
  '6': '⁶',
  '7': '⁷',
  '8': '⁸',
  '9': '⁹',
};

function powerOfTen(value: number): string {
  const [mantissa, exponent] = value.toExponential().split('e');
  const power = [...String(Number(exponent))].map((digit) => raised[digit]).join('');
  return `${mantissa.replace('-', '−')} × 10${power}`;
}

/** A size of a file: 384 kB, 2.9 MB. */
export function fileSize(bytes: number): string {
  if (bytes < 1000) return `${bytes}${thinSpace}B`;
  const [value, unit] = bytes < 1e6 ? [bytes / 1e3, 'kB'] : [bytes / 1e6, 'MB'];
  return `${formatNumber(value, value < 10 ? 1 : 0)}${thinSpace}${unit}`;
}

/** A time to come or gone: 41 s, 3 min 10 s, 1 h 20 min. */
export function duration(seconds: number): string {
  const s = Math.max(0, Math.round(seconds));
  if (s < 60) return `${s} s`;
  if (s < 3600) return s % 60 === 0 ? `${s / 60} min` : `${Math.floor(s / 60)} min ${s % 60} s`;
  const minutes = Math.round(s / 60);
  return minutes % 60 === 0 ? `${minutes / 60} h` : `${Math.floor(minutes / 60)} h ${minutes % 60} min`;
}
