import { describe, expect, it } from 'vitest';
import { linearTicks, logTicks, paddedDomain } from '@/lib/figures/ticks';

const labels = (ticks: { label: string; major: boolean }[]) =>
  ticks.filter((t) => t.major).map((t) => t.label);

describe('ticks of a linear axis', () => {
  it('labels multiples of 2 from −4 to 4 and marks the odd numbers between them', () => {
    const ticks = linearTicks(-4.5, 4.5, 5);
    expect(labels(ticks)).toEqual(['−4', '−2', '0', '2', '4']);
    expect(ticks.filter((t) => !t.major).map((t) => t.value)).toEqual([-3, -1, 1, 3]);
  });

  it('gives equal decimals to all labels', () => {
    expect(labels(linearTicks(0.52, 0.88, 4))).toEqual(['0.6', '0.7', '0.8']);
    expect(labels(linearTicks(-1, 1, 4))).toEqual(['−1.0', '−0.5', '0.0', '0.5', '1.0']);
  });

  it('includes the ends where they are round', () => {
    expect(labels(linearTicks(0, 1200, 6))).toEqual([
      '0',
      '200',
      '400',
      '600',
      '800',
      '1\u202f000',
      '1\u202f200',
    ]);
  });

  it('has none where the ends span nothing', () => {
    expect(linearTicks(2, 2)).toEqual([]);
    expect(linearTicks(0, NaN)).toEqual([]);
  });
});

describe('ticks of a logarithmic axis', () => {
  it('labels 1 and 3 times powers of ten from 0.003 to 0.3 and marks the other multiples', () => {
    const ticks = logTicks(0.003, 0.3);
    expect(labels(ticks)).toEqual(['0.003', '0.01', '0.03', '0.1', '0.3']);
    expect(ticks.filter((t) => !t.major).map((t) => t.value)).toContain(0.2);
    expect(ticks).toHaveLength(19);
  });

  it('keeps an end that misses its round number by rounding', () => {
    expect(labels(logTicks(0.003, 0.003 * 100))).toContain('0.3');
  });

  it('labels more digits within one decade and powers of ten alone over many', () => {
    expect(labels(logTicks(0.1, 0.6))).toEqual(['0.1', '0.2', '0.5']);
    expect(labels(logTicks(1e-4, 1e2))).toEqual(['1e−4', '0.001', '0.01', '0.1', '1', '10', '100']);
  });

  it('has none where an end is not positive', () => {
    expect(logTicks(0, 1)).toEqual([]);
  });
});

describe('the interval of an axis', () => {
  it('holds all values and ends on round numbers', () => {
    const [lo, hi] = paddedDomain([-3.1, 2, NaN, 4.2]);
    expect(lo).toBe(-4);
    expect(hi).toBe(5);
  });

  it('is −1 to 1 without values and has a width round a single one', () => {
    expect(paddedDomain([NaN])).toEqual([-1, 1]);
    const [lo, hi] = paddedDomain([5, 5]);
    expect(lo).toBeLessThan(5);
    expect(hi).toBeGreaterThan(5);
  });
});
