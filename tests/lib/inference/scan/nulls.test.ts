import { describe, expect, it } from 'vitest';
import { createRng } from '@/lib/sampler';
import {
  buildCollapsedModel,
  globalTail,
  lineNulls,
  NullDraws,
  nullThreshold,
  planeNulls,
  runScan,
  trialColumns,
} from '@/lib/inference/scan';
import { PlaneStatistic } from '@/lib/inference/scan/plane-statistic';
import { NullStatistics } from '@/lib/inference/scan/null-statistics';
import { localTail } from '@/lib/inference/scan/significance';
import { buildWhitening } from '@/lib/inference/whitening';
import { choleskyInto } from '@/lib/inference/cholesky';
import { binned, madeUpData, madeUpSpec } from '../fixtures';

/** Largest distance of the values from the uniform distribution on [0, 1]: Kolmogorov and Smirnov's, times √n. */
function uniformDistance(values: number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const n = sorted.length;
  return Math.sqrt(n) * Math.max(...sorted.map((p, i) => Math.max(p - i / n, (i + 1) / n - p)));
}

/** The distance that 1e-4 of uniform samples exceed. */
const KOLMOGOROV = 2.23;

const whole = (spec: ReturnType<typeof madeUpSpec>, mocks: number | null) => ({
  covariance: spec.data.covariance,
  rows: 16,
  kept: Array.from({ length: 16 }, (_, i) => i),
  mocks,
});

const draws = (source: ConstructorParameters<typeof NullDraws>[0], seed = 'nulls'): NullDraws =>
  new NullDraws(source, createRng(`${seed}/data`), createRng(`${seed}/mocks`));

describe('the height that a share of the nulls exceeds', () => {
  it('is where global p comes down to it, by its own definition', () => {
    const rng = createRng('thresholds');
    const heights = Float64Array.from({ length: 199 }, () => rng.uniform());
    for (const p of [0.005, 0.01, 0.05, 0.5]) {
      const height = nullThreshold(heights, p) ?? NaN;
      expect(globalTail(heights, height + 1e-12)).toBeLessThanOrEqual(p + 1e-12);
      expect(globalTail(heights, height - 1e-12)).toBeGreaterThan(p);
    }
  });

  it('is unknown where the nulls are too few', () => {
    expect(nullThreshold(new Float64Array(18), 0.05)).toBeNull();
    expect(nullThreshold(new Float64Array(19).fill(3), 0.05)).toBe(3);
  });
});

describe('nulls', () => {
  it.each([
    ['known covariance, two columns', 'free-phase', {}, null],
    ['known covariance, one column', 'locked-squeezed', { vertex: 1 }, null],
    ['covariance from mocks, two columns', 'free-phase', {}, 40],
    ['covariance from mocks, one column', 'locked-squeezed', { vertex: 2 }, 40],
  ] as const)('%s: the local p of one frequency is uniform', (_, id, options, mocks) => {
    const base = madeUpSpec(id, { ...options, fields: 1, background: [1] });
    const spec = { ...base, data: { ...base.data, mockCount: mocks } };
    const model = buildCollapsedModel(spec);
    const places = trialColumns(model, Float64Array.of(2.3)) ?? [];
    const statistics = new NullStatistics(
      model.blocks[0].fixed.map((c) => c ?? new Float64Array(16)),
      places,
    );
    const source = draws(whole(spec, mocks));
    const gains = new Float64Array(1);
    const tails = Array.from({ length: 4000 }, () => {
      statistics.load(source.next());
      statistics.gains(gains);
      const chiSquare = { without: statistics.chiSquare, with: statistics.chiSquare - gains[0] };
      return localTail(model.blocks[0], mocks, chiSquare, model.coordinates.freedom ?? NaN, 1);
    });
    expect(uniformDistance(tails)).toBeLessThan(KOLMOGOROV);
  });

  it('a χ² tail would not do for 40 mocks: the same test fails with it', () => {
    const base = madeUpSpec('free-phase', { fields: 1, background: [1] });
    const spec = { ...base, data: { ...base.data, mockCount: 40 } };
    const model = buildCollapsedModel(spec);
    const places = trialColumns(model, Float64Array.of(2.3)) ?? [];
    const statistics = new NullStatistics(
      model.blocks[0].fixed.map((c) => c ?? new Float64Array(16)),
      places,
    );
    const source = draws(whole(spec, 40));
    const gains = new Float64Array(1);
    const tails = Array.from({ length: 4000 }, () => {
      statistics.load(source.next());
      statistics.gains(gains);
      return Math.exp(-gains[0] / 2);
    });
    expect(uniformDistance(tails)).toBeGreaterThan(2 * KOLMOGOROV);
  });

  it('the reduced algebra gives what a scan of the simulated measurement itself gives', () => {
    const base = madeUpSpec('free-phase', { fields: 1, background: [1, 2] });
    const data = { ...madeUpData(0.05, 40) };
    const whitening = buildWhitening(data);
    const lower = Float64Array.from(data.covariance);
    choleskyInto(lower, 16, lower);
    const grid = Float64Array.of(0.5, 1.7, 3.1, 6);
    const spec = { ...base, data, likelihood: 'sellentin-heavens' as const };
    const model = buildCollapsedModel(spec);
    const statistics = new NullStatistics(
      model.blocks[0].fixed.map((c) => c ?? new Float64Array(16)),
      trialColumns(model, grid) ?? [],
    );
    const source = draws(whole(spec, 40));
    const gains = new Float64Array(grid.length);
    for (let trial = 0; trial < 3; trial += 1) {
      const { noise, metric } = source.next();
      if (!metric) throw new Error('no covariance was drawn');
      statistics.load({ noise, metric });
      statistics.gains(gains);
      // Back to the measurement's own units: d = L z, S* = (L M)(L M)ᵀ.
      const S = new Float64Array(16);
      const root = new Float64Array(256);
      for (let i = 0; i < 16; i += 1) {
        for (let k = 0; k <= i; k += 1) {
          S[i] += lower[i * 16 + k] * noise[k];
          for (let j = 0; j <= k; j += 1) root[i * 16 + j] += lower[i * 16 + k] * metric[k * 16 + j];
        }
      }
      const covariance = new Float64Array(256);
      for (let i = 0; i < 16; i += 1) {
        for (let j = 0; j < 16; j += 1) {
          for (let k = 0; k < 16; k += 1) covariance[i * 16 + j] += root[i * 16 + k] * root[j * 16 + k];
        }
      }
      const simulated = buildCollapsedModel({ ...spec, data: { S, covariance, mockCount: 40 } });
      const without = simulated.background().chiSquare[0];
      expect(statistics.chiSquare).toBeCloseTo(without, 8);
      grid.forEach((mu, i) => expect(gains[i]).toBeCloseTo(without - simulated.fit([mu]).chiSquare[0], 7));
    }
    expect(whitening.length).toBe(16);
  });

  it.each([
    ['free-phase', {}, false],
    ['locked-squeezed', { vertex: 1 }, true],
  ] as const)('%s: every pair of the plane falls as the two-field fit does', (id, options, sameSign) => {
    const one = madeUpSpec(id, { ...options, fields: 1, background: [1] });
    const two = madeUpSpec(id, { ...options, fields: 2, background: [1] });
    const single = buildCollapsedModel(one);
    const pair = buildCollapsedModel(two);
    const grid = Float64Array.of(0.6, 1.5, 2.9, 4.2, 6.5);
    const statistics = new NullStatistics(
      single.blocks[0].fixed.map((c) => c ?? new Float64Array(16)),
      trialColumns(single, grid) ?? [],
    );
    statistics.load({ noise: single.blocks[0].data, metric: null });
    const out = new Float64Array(10);
    new PlaneStatistic(statistics, sameSign, false).largest(out);
    const without = pair.background().chiSquare[0];
    let at = 0;
    for (let i = 0; i < 5; i += 1) {
      for (let j = i + 1; j < 5; j += 1) {
        expect(out[at]).toBeCloseTo(without - pair.fit([grid[i], grid[j]]).chiSquare[0], 6);
        at += 1;
      }
    }
  });

  it('scans of one measurement with other cuts see the same nulls', () => {
    const base = madeUpSpec('free-phase', { fields: 1, background: [1] });
    const all = draws(whole(base, 40));
    const kept = [0, 1, 2, 3, 4, 5, 6, 7, 8, 9];
    const cut = draws({ ...whole(base, 40), kept });
    const other = draws({ ...whole(base, 40), kept: [3, 4, 5, 6, 7] });
    for (let i = 0; i < 3; i += 1) {
      const { noise, metric } = all.next();
      const part = cut.next();
      expect([...part.noise]).toEqual([...noise.subarray(0, 10)].map((value) => expect.closeTo(value, 10)));
      for (let r = 0; r < 10; r += 1) {
        for (let c = 0; c <= r; c += 1) {
          expect(part.metric?.[r * 10 + c]).toBeCloseTo(metric?.[r * 16 + c] ?? NaN, 10);
        }
      }
      expect(other.next().noise).toHaveLength(5);
    }
  });

  it('with a strong signal no null reaches the data, and p says how many there were', () => {
    const spec = madeUpSpec('free-phase', { fields: 1, background: [1] }, {}, 0.01);
    const found = runScan({
      one: spec,
      two: null,
      axes: [binned],
      muMin: 0.2,
      muMax: 8,
      nulls: 500,
      source: whole(spec, null),
      seed: 's',
    });
    expect(Math.abs(found.line.best.mu - 2.3)).toBeLessThan(0.3);
    expect(found.nulls?.globalP).toBe(1 / 501);
    expect(found.localP).toBeLessThan(1e-6);
    expect(found.globalPUpcrossing).toBeLessThan(1e-4);
    expect(found.aliases.length).toBe(0);
    expect(found.facts.nyquist).toBeCloseTo(Math.PI / (Math.log(25) / 16), 6);
    expect(found.window.power[0]).toBeCloseTo(1, 10);
  });

  it('planes count nulls too', () => {
    const one = madeUpSpec('locked-squeezed', { vertex: 1, fields: 1, background: [1] });
    const single = buildCollapsedModel(one);
    const places =
      trialColumns(
        single,
        Float64Array.from({ length: 24 }, (_, i) => 0.3 + 0.3 * i),
      ) ?? [];
    const settings = { count: 200, draws: draws(whole(one, null)) };
    const line = lineNulls(single, places, { ...settings, draws: draws(whole(one, null)) });
    const plane = planeNulls(single, places, true, settings);
    // Two fields fit whatever one does.
    plane.heights.forEach((height, i) => expect(height).toBeGreaterThan(line.heights[i] - 0.3));
    expect(plane.globalP).toBeGreaterThan(0);
  });
});
