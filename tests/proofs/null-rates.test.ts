import { describe, expect } from 'vitest';
import {
  buildCollapsedModel,
  globalTail,
  lineNulls,
  NullDraws,
  scanGrid,
  trialColumns,
  upcrossingTail,
} from '@/lib/inference/scan';
import { createRng } from '@/lib/sampler';
import { madeUpSpec } from '../lib/inference/fixtures';
import { proof } from './proof';

const rows = 16;
const kept = Array.from({ length: rows }, (_, i) => i);

/** Heights of `count` nulls of a scan of one field over 0.5 < μ < 12. */
function nullsOf(
  id: string,
  options: Record<string, unknown>,
  mocks: number | null,
  count: number,
  seed: string,
) {
  const base = madeUpSpec(id, { ...options, fields: 1, background: [1] });
  const spec = {
    ...base,
    data: { ...base.data, mockCount: mocks },
    likelihood: mocks === null ? ('normal' as const) : ('sellentin-heavens' as const),
  };
  const model = buildCollapsedModel(spec);
  const places = trialColumns(model, scanGrid(0.5, 12, id === 'free-phase' ? Math.log(25) : 6)) ?? [];
  const draws = new NullDraws(
    { covariance: spec.data.covariance, rows, kept, mocks },
    createRng(`${seed}/data`),
    createRng(`${seed}/mocks`),
  );
  return lineNulls(model, places, { count, draws });
}

/** The height that this part of the nulls exceed. */
const quantile = (heights: Float64Array, part: number): number =>
  Float64Array.from(heights).sort()[Math.floor((1 - part) * heights.length)];

describe('nulls', () => {
  proof(
    {
      name: 'null-rates',
      claim:
        'a 5 % threshold from one set of nulls is exceeded by 5 % of another, with known covariance and with mocks; upcrossings give the simulated global p with free phases and bound it with locked ones',
      unit: 'simulated nulls, each of two sets',
      gate: 1_500,
      full: 20_000,
      seed: 20,
    },
    ({ size, full, seed, record }) => {
      const cases = [
        { name: 'free phase', id: 'free-phase', options: {}, mocks: null, freedom: 2 },
        { name: 'locked phase', id: 'locked-squeezed', options: { vertex: 1 }, mocks: null, freedom: 1 },
        { name: 'free phase, 60 mocks', id: 'free-phase', options: {}, mocks: 60, freedom: 2 },
      ] as const;
      const found = cases.map(({ name, id, options, mocks, freedom }) => {
        const threshold = nullsOf(id, options, mocks, size, `${seed}/threshold/${name}`);
        const test = nullsOf(id, options, mocks, size, `${seed}/test/${name}`);
        const height = quantile(threshold.heights, 0.05);
        const rate = test.heights.reduce((sum, value) => sum + (value >= height ? 1 : 0), 0) / size;
        const ratios =
          mocks === null
            ? [0.05, 0.01].map((p) => {
                const at = quantile(test.heights, p);
                return (
                  upcrossingTail(at, freedom, test.level, test.upcrossings) / globalTail(test.heights, at)
                );
              })
            : [];
        return { name, freedom, height, rate, upcrossingsOverSimulation: ratios };
      });
      record({ found });
      for (const { name, freedom, rate, upcrossingsOverSimulation } of found) {
        expect(Math.abs(rate - 0.05), name).toBeLessThan(3.5 * Math.sqrt(0.0475 * (2 / size)));
        // Widened by the error of a small sample's quantile: √((1 − p)/(p n)) at p = 0.01, beyond that of the full size.
        const wider = 3 * (Math.sqrt(0.99 / (0.01 * size)) - Math.sqrt(0.99 / (0.01 * full)));
        for (const ratio of upcrossingsOverSimulation) {
          expect(ratio, name).toBeGreaterThan(0.85 / (1 + wider));
          // A locked phase oscillates faster in μ than its envelope: one excursion crosses several times, and the mean number
          // of crossings is more than the probability of any.
          if (freedom === 2) expect(ratio, name).toBeLessThan(1.2 * (1 + wider));
        }
      }
    },
  );
});
