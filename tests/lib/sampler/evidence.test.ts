import { describe, expect, it } from 'vitest';
import { evidenceOf } from '@/lib/sampler';
import type { LogSums } from '@/lib/sampler';
import { addEntry, addLogs, batchMeans, emptySums } from '@/lib/sampler/log-sums';
import { createRng } from '@/lib/sampler/rng';

describe('running sums of exponentials', () => {
  it('are those of the entries, in batches of equal length, joined as they fill up', () => {
    const rng = createRng('sums');
    const entries = Array.from({ length: 1000 }, () => [300 * rng.normal(), rng.normal()]);
    const sums = emptySums(2);
    entries.forEach((entry) => addEntry(sums, entry));
    // 1000 entries: batches of 32 leave 31 complete ones, which is the first length that fits.
    expect([sums.length, sums.filled, sums.count]).toEqual([32, 31, 8]);
    batchMeans(sums).forEach((means, batch) => {
      const own = entries.slice(32 * batch, 32 * batch + 32);
      for (const q of [0, 1]) {
        const top = Math.max(...own.map((entry) => entry[q]));
        const sum = own.reduce((all, entry) => all + Math.exp(entry[q] - top), 0);
        expect(means[q]).toBeCloseTo(top + Math.log(sum / 32), 9);
      }
    });
  });

  it('join neighbours on being read', () => {
    const sums = emptySums(1);
    for (let i = 1; i <= 5; i++) addEntry(sums, [Math.log(i)]);
    expect(batchMeans(sums, 2).map(([log]) => Math.exp(log))).toEqual([
      expect.closeTo(1.5),
      expect.closeTo(3.5),
    ]);
    expect(batchMeans(sums, 4).map(([log]) => Math.exp(log))).toEqual([expect.closeTo(2.5)]);
  });

  it('take an empty sum for what it is', () => {
    expect(addLogs(-Infinity, -Infinity)).toBe(-Infinity);
    expect(addLogs(-Infinity, 3)).toBe(3);
    expect(addLogs(800, 800)).toBeCloseTo(800 + Math.LN2, 12);
  });
});

/** Sums whose entries are exponentials of normals, ln of the mean being `shift` + sd²/2. */
function normals(seed: string, count: number, sd: number, shift: (i: number) => number): LogSums {
  const rng = createRng(seed);
  const sums = emptySums(1);
  for (let i = 0; i < count; i++) addEntry(sums, [shift(i) + sd * rng.normal()]);
  return sums;
}

describe('the evidence', () => {
  it('has an error that is that of its scatter, over 300 runs', () => {
    const found = Array.from({ length: 300 }, (_, run) => {
      const evidence = evidenceOf([0, 1, 2, 3].map((r) => normals(`scatter/${run}/${r}`, 640, 0.7, () => 0)));
      if (!('value' in evidence)) throw new Error(evidence.because);
      return evidence;
    });
    const exact = 0.245;
    const mean = found.reduce((sum, { value }) => sum + value, 0) / 300;
    const scatter = Math.sqrt(found.reduce((sum, { value }) => sum + (value - exact) ** 2, 0) / 300);
    const quoted = Math.sqrt(found.reduce((sum, { error }) => sum + error ** 2, 0) / 300);
    expect(Math.abs(mean - exact)).toBeLessThan((4 * quoted) / Math.sqrt(300));
    // Four standard deviations of a ratio of 300.
    expect(Math.abs(scatter / quoted - 1)).toBeLessThan(4 / Math.sqrt(600));
    // Correlation that is found by chance makes it larger on average.
    const least = Math.sqrt(Math.expm1(0.49) / 2560);
    expect(quoted / least).toBeGreaterThan(0.97);
    expect(quoted / least).toBeLessThan(1.15);
  });

  /** Like `normals`, with neighbours correlated as ρ. */
  function slowly(seed: string, rho: number, sd: number): LogSums {
    const rng = createRng(seed);
    let z = rng.normal();
    const sums = emptySums(1);
    for (let i = 0; i < 6400; i++) {
      addEntry(sums, [sd * z]);
      z = rho * z + Math.sqrt(1 - rho * rho) * rng.normal();
    }
    return sums;
  }

  it('joins batches whose neighbours are alike: over 200 runs of slow chains the error is that of the scatter', () => {
    const found = Array.from({ length: 200 }, (_, run) => {
      const evidence = evidenceOf([0, 1, 2, 3].map((r) => slowly(`slow/${run}/${r}`, 0.98, 0.5)));
      return 'value' in evidence ? [evidence] : [];
    }).flat();
    expect(found.length).toBeGreaterThan(190);
    const scatter = Math.sqrt(found.reduce((sum, { value }) => sum + (value - 0.125) ** 2, 0) / found.length);
    const quoted = Math.sqrt(found.reduce((sum, { error }) => sum + error ** 2, 0) / found.length);
    // Four standard deviations of a ratio of 200, and a tenth for what the likeness within batches hides.
    expect(Math.abs(scatter / quoted - 1)).toBeLessThan(4 / Math.sqrt(400) + 0.1);
  });

  it('says nothing wrong where chains hardly move in all their draws: no value, or an error that covers it', () => {
    const found = Array.from({ length: 40 }, (_, run) =>
      evidenceOf([0, 1, 2, 3].map((r) => slowly(`still/${run}/${r}`, 0.9998, 1))),
    );
    const values = found.filter((each) => 'value' in each);
    expect(values.length).toBeLessThan(20);
    expect(values.filter(({ value, error }) => Math.abs(value - 0.5) > 4 * error).length).toBeLessThan(4);
  });

  it.each([
    ['one replica', [normals('a', 640, 0.1, () => 0)], /one replica/],
    ['few entries', [normals('a', 3, 0.1, () => 0), normals('b', 3, 0.1, () => 0)], /fewer than 15 degrees/],
    ['replicas apart', [normals('a', 640, 0.1, () => 0), normals('b', 640, 0.1, () => 0.2)], /don’t agree/],
    [
      'nothing in common',
      [normals('a', 640, 0, () => -Infinity), normals('b', 640, 0, () => -Infinity)],
      /overlap/,
    ],
  ])('has no value for %s, and says why', (_, sums, reason) => {
    const evidence = evidenceOf(sums);
    if (!('because' in evidence)) throw new Error('a value');
    expect(evidence.because).toMatch(reason);
  });
});
