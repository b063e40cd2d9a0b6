import { expect, it } from 'vitest';
import { runP1 } from '../../scripts/bench/p1';

it('The benchmark counts a run whose means agree with the reference, and says what it cost', () => {
  const p1 = runP1(2000, 'test of the benchmark');
  expect(Object.keys(p1.mean)).toEqual(['mu1', 'A1', 'phi1', 'mu2', 'A2', 'phi2', 'c1', 'c2']);
  expect(p1.worstMeanInErrors).toBeLessThan(4);
  expect(p1.momentsRight).toBe(true);
  expect(p1.essWorst).toBeGreaterThan(400);
  expect(p1.essWorst).toBeLessThan(8000);
  expect(p1.essWorstPerCpuSecond).toBeCloseTo(p1.essWorst / p1.cpuSeconds, 6);
  expect(p1.evaluationsPerCpuSecond).toBeGreaterThan(10_000);
  expect(p1.logEvidence?.value).toBeCloseTo(p1.logEvidenceReference, 0);
});
