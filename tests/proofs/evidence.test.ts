import { describe, expect } from 'vitest';
import { advance, betaQuantile, diagnose, evidenceOf, startReplica } from '@/lib/sampler';
import type { LogSums, SamplerSettings } from '@/lib/sampler';
import { evidenceProblems, type EvidenceProblem } from '../published/evidence-problems';
import { proof } from './proof';

/** Problems with known evidence: tests/published/data/evidence/README.md. No jump: walks, differential evolution and the ladder alone. */
const KEPT = 2000;

function settingsOf({ blocks }: EvidenceProblem): SamplerSettings {
  const ladder = { everyInWarmup: 1, every: 1, everyWhereJumpsDo: 1, maxRungs: 24, rejection: 0.35 };
  return { warmup: 1500, blocks, differential: true, ladder };
}

/** The value that Student's t exceeds with this probability. */
function tQuantile(above: number, dof: number): number {
  const x = betaQuantile(2 * above, dof / 2, 0.5);
  return Math.sqrt(dof * (1 / x - 1));
}

function runOnce(problem: EvidenceProblem, seed: string) {
  const settings = settingsOf(problem);
  const runs = [0, 1, 2, 3].map((replica) => {
    const start = startReplica(problem.target, [], settings, seed, replica);
    const warm = advance(problem.target, [], settings, start, settings.warmup).state;
    return advance(problem.target, [], settings, warm, KEPT);
  });
  const stones = runs.flatMap(({ state }): LogSums[] => (state.ladder?.stones ? [state.ladder.stones] : []));
  const chains = problem.target.names.map((_, i) =>
    runs.map(({ block }) =>
      Float64Array.from({ length: KEPT }, (__, k) => block.values[k * block.width + 2 + i]),
    ),
  );
  return { evidence: evidenceOf(stones), diagnoses: chains.map((each) => diagnose(each)) };
}

/** How far the moments of all seeds together are off, in their errors; the worst of all parameters. */
function worstMoment(problem: EvidenceProblem, runs: ReturnType<typeof runOnce>[]): number {
  const { mean, sd } = problem;
  if (!mean || !sd) return 0;
  const off = (exact: number, found: { value: number; error: number }[]) => {
    const sum = found.reduce((all, { value }) => all + value - exact, 0);
    return Math.abs(sum) / Math.sqrt(found.reduce((all, { error }) => all + error * error, 0));
  };
  return Math.max(
    ...mean.map((exact, i) =>
      Math.max(
        off(
          exact,
          runs.map(({ diagnoses }) => ({ value: diagnoses[i].mean, error: diagnoses[i].mcseMean })),
        ),
        off(
          sd[i],
          runs.map(({ diagnoses }) => ({ value: diagnoses[i].sd, error: diagnoses[i].mcseSd })),
        ),
      ),
    ),
  );
}

describe('evidences by the ladder', () => {
  proof(
    {
      name: 'evidence-ladder',
      claim:
        'on fourteen problems with known evidence every run is within t(0.99995) of its error, and the scatter over the runs is the error quoted',
      unit: 'runs of four replicas a problem',
      gate: 2,
      full: 40,
      seed: 20261,
    },
    ({ size, full, seed, record }) => {
      const figures: Record<string, unknown> = {};
      const rows = evidenceProblems.map((problem) => {
        const runs = Array.from({ length: size }, (_, k) => runOnce(problem, `${seed}/${problem.name}/${k}`));
        const found = runs.flatMap(({ evidence }) => ('value' in evidence ? [evidence] : []));
        const squares = found.map(({ value }) => (value - problem.logZ) ** 2);
        const scatter = Math.sqrt(squares.reduce((sum, each) => sum + each, 0) / found.length);
        const quoted = Math.sqrt(found.reduce((sum, { error }) => sum + error ** 2, 0) / found.length);
        const worst = Math.max(
          ...found.map(
            ({ value, error, dof }) => Math.abs(value - problem.logZ) / error / tQuantile(5e-5, dof),
          ),
        );
        const bias = found.reduce((sum, { value }) => sum + value - problem.logZ, 0) / found.length;
        const row = {
          values: found.length,
          exact: problem.logZ,
          bias,
          quoted,
          scatterOverQuoted: scatter / quoted,
          worstOverBound: worst,
          worstMoment: worstMoment(problem, runs),
        };
        figures[problem.name] = row;
        record(figures);
        return { name: problem.name, ...row };
      });
      // All problems together have the scatter of many runs; each by itself is judged where there are enough of it.
      const square = rows.reduce((sum, row) => sum + row.scatterOverQuoted ** 2, 0) / rows.length;
      const wider = Math.max(1, Math.sqrt(full / (size * rows.length)));
      record({ scatterOverQuotedOfAll: Math.sqrt(square) });
      expect(Math.sqrt(square)).toBeGreaterThan(0.65 ** wider);
      expect(Math.sqrt(square)).toBeLessThan(1.5 ** wider);
      for (const row of rows) {
        expect(row.values, `${row.name}: runs with a value`).toBeGreaterThanOrEqual(Math.floor(0.9 * size));
        expect(row.worstOverBound, row.name).toBeLessThan(1);
        if (size === full) {
          expect(row.scatterOverQuoted, row.name).toBeGreaterThan(0.65);
          expect(row.scatterOverQuoted, row.name).toBeLessThan(1.5);
        }
        expect(row.worstMoment, `moments of ${row.name}`).toBeLessThan(4.2);
      }
    },
  );
});
