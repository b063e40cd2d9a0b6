import { describe, expect, it } from 'vitest';
import { createRng, diagnose } from '@/lib/sampler';
import type { FitColumns } from '@/lib/services/fit-model';
import { KeptDraws, lookAt } from '@/lib/services/fit-report';
import { emptyReport } from '@/lib/schemas/stored-report';

/** One parameter x, its double, and a derived quantity that is always 1. */
const columns: FitColumns = {
  sampled: ['x'],
  derived: ['double', 'one'],
  width: 3,
  derive(values, offset, out) {
    out[0] = 2 * values[offset + 2];
    out[1] = 1;
  },
};
const warmup = 10;

/** Two replicas of independent normal draws; warm-up is far off, so that it would be noticed. */
function fill(kept: number) {
  const draws = new KeptDraws(columns, warmup, 2);
  const chains = [0, 1].map((replica) => {
    const rng = createRng(`replica ${replica}`);
    const values = new Float64Array(3 * (warmup + kept));
    for (let i = 0; i < warmup + kept; i++) values[3 * i + 2] = i < warmup ? 1e6 : rng.normal();
    draws.append(replica, 0, 1, values.subarray(0, 3 * warmup));
    draws.append(replica, warmup, 1, values.subarray(3 * warmup));
    return Float64Array.from({ length: kept }, (_, i) => values[3 * (warmup + i) + 2]);
  });
  return { draws, chains };
}
const target = { rhat: 1.05, ess: 400 };

describe('a look at a fit', () => {
  it('reports parameters and derived quantities over the kept draws alone', () => {
    const { draws, chains } = fill(1200);
    const report = lookAt(draws, columns, { warmup, draws: warmup + 1200, target }, emptyReport);
    expect(report.draws).toBe(1210);
    expect(report.diagnostics.map(({ parameter, derived }) => [parameter, derived])).toEqual([
      ['x', false],
      ['double', true],
      ['one', true],
    ]);
    const { mean, sd, rhat, essBulk } = diagnose(chains);
    expect(report.diagnostics[0]).toMatchObject({ mean, sd, rhat, essBulk });
    expect(report.diagnostics[1].mean).toBeCloseTo(2 * mean, 12);
  });

  it('doesn’t wait for a derived quantity that is one number throughout', () => {
    const { draws } = fill(1200);
    const report = lookAt(draws, columns, { warmup, draws: warmup + 1200, target }, emptyReport);
    expect(report.diagnostics[2]).toMatchObject({ mean: 1, rhat: null, essBulk: null });
    expect(report.gate).toEqual({ met: true, reasons: [] });
  });

  it('judges nothing before 1,000 kept draws, and says so', () => {
    const { draws } = fill(999);
    const report = lookAt(draws, columns, { warmup, draws: warmup + 999, target }, emptyReport);
    expect(report.gate.met).toBe(false);
    expect(report.gate.reasons).toHaveLength(1);
    expect(report.gate.reasons[0]).toContain('999');
  });

  it('expects four times the effective size from four times the draws, and no later than is usual', () => {
    const { draws } = fill(1200);
    const look = { warmup, draws: warmup + 1200 };
    const [{ essBulk, essTail }] = lookAt(draws, columns, { ...look, target }, emptyReport).diagnostics;
    const least = Math.min(Number(essBulk), Number(essTail));
    const far = { rhat: 1.05, ess: 4 * least };
    const { estimate, wanted } = lookAt(draws, columns, { ...look, target: far }, emptyReport);
    // Two replicas usually make one effective draw a draw; independent ones make two.
    expect(estimate).toBeGreaterThan(4 * 1200);
    expect(estimate).toBeLessThan(4 * least);
    expect(Math.abs(Math.log2((wanted! - 1200) / (estimate! - 1200)))).toBeLessThan(1);
  });

  it('reads exactly the draws that are served when they are thinned', () => {
    const { draws, chains } = fill(50_002);
    const served = draws.chains(50_002).get('x');
    expect(served?.map((chain) => chain.length)).toEqual([25_001, 25_001]);
    served?.forEach((chain, replica) => {
      expect(chain).toEqual(chains[replica].filter((_, k) => k % 2 === 0));
    });
  });

  it('keeps at most sixty entries of its history, the last among them', () => {
    const { draws } = fill(6400);
    let report = emptyReport;
    for (let kept = 50; kept <= 6400; kept += 50) {
      report = lookAt(draws, columns, { warmup, draws: warmup + kept, target }, report);
      expect(report.history.length).toBeLessThanOrEqual(60);
      expect(report.history.at(-1)?.draws).toBe(kept);
    }
    const counts = report.history.map((entry) => entry.draws);
    expect(counts).toEqual([...counts].sort((a, b) => a - b));
    expect(counts.length).toBeGreaterThanOrEqual(30);
  });
});
