import { describe, expect, it } from 'vitest';
import {
  decimalsByMcse,
  decimalsForSpan,
  formatByMcse,
  formatCount,
  formatInterval,
  formatIntervals,
  formatNumber,
  formatPercent,
  parseNumber,
} from '@/lib/figures/format';

describe('numbers as text', () => {
  it('writes a true minus and thin spaces between thousands', () => {
    expect(formatNumber(-2.75, 2)).toBe('\u22122.75');
    expect(formatCount(12400)).toBe('12\u202f400');
    expect(formatCount(1234567)).toBe('1\u202f234\u202f567');
    expect(formatNumber(1234.5678, 4)).toBe('1\u202f234.5678');
    expect(formatCount(999)).toBe('999');
  });

  it('never writes minus zero, and a dash for what is not a number', () => {
    expect(formatNumber(-0.001, 2)).toBe('0.00');
    expect(formatNumber(NaN, 2)).toBe('–');
    expect(formatNumber(-Infinity, 2)).toBe('\u2212∞');
  });

  it('rounds to tens where decimals are negative', () => {
    expect(formatNumber(1234, -1)).toBe('1\u202f230');
    expect(formatNumber(-86, -2)).toBe('\u2212100');
  });

  it.each([
    // The last digit is worth at least twice the error: 0.1 ≥ 2 × 0.05, but 0.01 < 2 × 0.006.
    [0.05, 1],
    [0.051, 0],
    [0.006, 1],
    [0.005, 2],
    [0.0004, 3],
    [0.6, -1],
    [3, -1],
    [0, 6],
  ])('allows, for a Monte Carlo error of %f, %i decimals', (mcse, decimals) => {
    expect(decimalsByMcse(mcse)).toBe(decimals);
    if (mcse > 0) expect(10 ** -decimals).toBeGreaterThanOrEqual(2 * mcse * (1 - 1e-9));
  });

  it('shows no digit finer than twice the Monte Carlo error', () => {
    expect(formatByMcse(3.6187, 0.006)).toBe('3.6');
    expect(formatByMcse(-28.4, 0.6)).toBe('\u221230');
    expect(formatByMcse(1, NaN)).toBe('–');
  });

  it('pads the ends of intervals so that a column stands', () => {
    expect(formatInterval(3.4, 3.8, 1)).toBe('3.4 to 3.8');
    const column = formatIntervals([
      { lo: -80, hi: -40, decimals: 0 },
      { lo: 9.2, hi: 12.4, decimals: 1 },
    ]);
    expect(column).toEqual([
      '\u00a0\u221280 to \u00a0\u221240',
      '\u00a09.2 to 12.4'.replace('\u00a09', '\u00a09'),
    ]);
    expect(column[0].length).toBe(column[1].length);
  });

  it('puts a thin space before the per cent sign', () => {
    expect(formatPercent(0.68)).toBe('68\u202f%');
  });

  it('chooses decimals by the span that a slider covers', () => {
    expect(decimalsForSpan(1, 12)).toBe(2);
    expect(decimalsForSpan(0, 0.02)).toBe(3);
    expect(decimalsForSpan(0, 5000)).toBe(0);
    expect(decimalsForSpan(1, 1)).toBe(2);
  });
});

describe('numbers from text', () => {
  it.each([
    ['-2.5', -2.5],
    ['\u22122.5', -2.5],
    ['12\u202f400', 12400],
    [' 1e-3 ', 0.001],
    ['.5', 0.5],
    ['+3', 3],
  ])('reads %j', (text, value) => expect(parseNumber(text)).toBe(value));

  it.each(['', '-', 'n/a', '1,5', '1e999', '0x10', '1 2 b'])('reads no number from %j', (text) =>
    expect(parseNumber(text)).toBeNull(),
  );
});
