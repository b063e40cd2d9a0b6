import { describe, expect, it } from 'vitest';
import { canonicalJson, canonicalSha256 } from '@/lib/services/canonical-json';
import { storedBlock } from '@/lib/services/fit-commit';
import { servedRows } from '@/lib/services/fit-draws';
import { blockEnd, isLook, storedOf, strideOf } from '@/lib/services/fit-schedule';
import { verdict } from '@/lib/services/fit-verdict';
import { exactDecimal } from '@/lib/services/sample-text';

describe('the stride of stored draws', () => {
  it('is the smallest power of two that leaves at most 50,000', () => {
    expect([1, 50_000, 50_001, 100_000, 100_001, 1_000_000].map((kept) => strideOf(kept))).toEqual([
      1, 1, 2, 2, 4, 32,
    ]);
    expect(storedOf(50_001)).toBe(25_001);
    expect(storedOf(1_000_000)).toBe(31_250);
  });
});

const course = { warmup: 1500, blockDraws: 500 };

describe('a block', () => {
  it('ends on the grid, at the end of warm-up, or at the budget', () => {
    expect(blockEnd(0, 9999, course)).toBe(500);
    expect(blockEnd(1000, 9999, course)).toBe(1500);
    expect(blockEnd(1500, 1730, course)).toBe(1730);
    expect(blockEnd(0, 9999, { warmup: 700, blockDraws: 500 })).toBe(500);
    expect(blockEnd(500, 9999, { warmup: 700, blockDraws: 500 })).toBe(700);
    expect(blockEnd(700, 9999, { warmup: 700, blockDraws: 500 })).toBe(1200);
  });

  it('that follows one which a budget cut short comes back to the grid', () => {
    expect(blockEnd(1730, 9999, course)).toBe(2000);
  });
});

describe('the looks at a fit', () => {
  it('are at every block end up to 4,000 kept draws of 500, then an eighth further each time', () => {
    const looks = [];
    for (let kept = 0; kept <= 12_000; kept += 250) if (isLook(kept, 500)) looks.push(kept);
    expect(looks).toEqual([
      ...[500, 1000, 1500, 2000, 2500, 3000, 3500, 4000, 4500],
      ...[5500, 6500, 7500, 8500, 10_000, 11_500],
    ]);
  });
});

describe('how a fit ends', () => {
  const standing = { draws: 2500, maxDraws: 5000, targetFrom: 0, stopRequested: false };
  it('is by its target at a look with 1,000 kept draws or more, else by budget or stop', () => {
    expect(verdict(course, true, standing)).toBe('converged');
    expect(verdict(course, true, { ...standing, draws: 2000 })).toBeNull();
    expect(verdict(course, true, { ...standing, draws: 2700 })).toBeNull();
    expect(verdict(course, true, { ...standing, draws: 2700, maxDraws: 1200 })).toBe('converged');
    expect(verdict(course, false, { ...standing, maxDraws: 1000 })).toBe('budget-spent');
    expect(verdict(course, false, { ...standing, stopRequested: true })).toBe('stopped');
    expect(verdict(course, true, { ...standing, stopRequested: true })).toBe('converged');
    expect(verdict(course, false, standing)).toBeNull();
  });

  it('waits for the whole budget where a converged fit was extended', () => {
    const extended = { ...standing, maxDraws: 2000, targetFrom: 2000 };
    expect(verdict(course, true, extended)).toBeNull();
    expect(verdict(course, true, { ...extended, draws: 3500 })).toBe('converged');
    expect(verdict(course, false, { ...extended, draws: 3500 })).toBe('budget-spent');
  });
});

describe('what is stored and served of many draws', () => {
  /** Served draws after a run in blocks of the given size: their numbers and values (each draw's value is its number). */
  function served(kept: number, block: number, warmup = 10) {
    const draws = warmup + kept;
    const numbers: number[] = [];
    const values: number[] = [];
    for (let first = 0; first < draws;) {
      const end = blockEnd(first, draws, { warmup, blockDraws: block });
      const made = Float64Array.from({ length: end - first }, (_, i) => first + i);
      const stored = storedBlock({ replica: 0, first, count: end - first, width: 1, values: made }, warmup);
      first = end;
      if (!stored) continue;
      expect(stored.values).toHaveLength(stored.rows);
      for (const { draw, row } of servedRows(stored, { warmup, draws })) {
        numbers.push(draw);
        values.push(stored.values[row]);
      }
    }
    return { numbers, values };
  }

  it('is all of warm-up and every stride-th kept draw, however the run was divided into blocks', () => {
    for (const kept of [0, 7, 50_000, 50_001, 130_003]) {
      const stride = strideOf(kept);
      const wanted = Array.from({ length: 10 }, (_, i) => i);
      for (let k = 0; k < kept; k += stride) wanted.push(10 + k);
      expect(wanted).toHaveLength(10 + storedOf(kept));
      for (const block of [500, 333, 7]) {
        expect(served(kept, block)).toEqual({ numbers: wanted, values: wanted });
      }
    }
  });
});

describe('canonical JSON', () => {
  it('has one text for one value, whatever the order of its keys', () => {
    expect(canonicalJson({ b: [{ d: 1, c: null }], a: 'ä' })).toBe('{"a":"ä","b":[{"c":null,"d":1}]}');
    expect(canonicalSha256({ a: 1, b: 2 })).toBe(canonicalSha256({ b: 2, a: 1 }));
    expect(canonicalSha256([1, 2])).not.toBe(canonicalSha256([2, 1]));
  });

  it('is hashed as UTF-8: SHA-256 of {} as printed by sha256sum', () => {
    expect(canonicalSha256({})).toBe('44136fa355b3678a1146ad16f7e8649e94fb4fc21fe77e8310c060f61caaff8a');
  });
});

describe('a number of a sample file', () => {
  it('is the shortest decimal that reads back as the same double', () => {
    for (const value of [0.1, 1 / 3, -0, 5e-324, 1.7976931348623157e308, 123456789.123456789]) {
      expect(Object.is(Number(exactDecimal(value)), value)).toBe(true);
    }
    expect(exactDecimal(0.1)).toBe('0.1');
  });
});
