import { describe, expect, it } from 'vitest';
import { createRng, diagnose, judgeGate } from '@/lib/sampler';

function independent(draws: number, seed: string, shift = 0): Float64Array[] {
  const rng = createRng(seed);
  return [0, 1, 2, 3].map((m) =>
    Float64Array.from({ length: draws }, () => rng.normal() + (m === 3 ? shift : 0)),
  );
}

describe('the convergence gate', () => {
  it('is met by well-mixed chains, without a reason', () => {
    const chains = independent(1000, 'good');
    expect(judgeGate({ chainsByParameter: { mu1: chains } })).toEqual({ met: true, reasons: [] });
  });

  it('names each quantity, value and remedy that is missing', () => {
    const verdict = judgeGate({
      chainsByParameter: { mu1: independent(1000, 'good'), a1: independent(1000, 'apart', 1) },
    });
    expect(verdict.met).toBe(false);
    expect(verdict.reasons[0]).toMatch(/^R-hat of a1 is 1\.\d{4}, not below 1\.01: .*run longer/);
    expect(verdict.reasons[1]).toMatch(/^The bulk effective sample size of a1 is \d+, not above 400: about/);
    expect(verdict.reasons.every((reason) => reason.includes('a1'))).toBe(true);
  });

  it('waits for enough draws, whatever they look like', () => {
    const verdict = judgeGate({ chainsByParameter: { mu1: independent(999, 'few') } });
    expect(verdict).toEqual({
      met: false,
      reasons: [expect.stringContaining('999 kept draws, fewer than the 1000')],
    });
    expect(judgeGate({ chainsByParameter: { mu1: independent(999, 'few') } }, undefined, 500).met).toBe(true);
  });

  it('follows the target that it is given', () => {
    const evidence = { chainsByParameter: { mu1: independent(1000, 'target') } };
    expect(judgeGate(evidence, { rhat: 1.01, ess: 1e6 }).reasons).toHaveLength(2);
    expect(judgeGate(evidence, { rhat: 1.0000001, ess: 1 }).reasons).toHaveLength(1);
  });

  it('is not met where a quantity has no diagnosis', () => {
    const constant = [0, 1, 2, 3].map(() => new Float64Array(1000).fill(3));
    const broken = independent(1000, 'broken');
    broken[2][5] = NaN;
    const verdict = judgeGate({ chainsByParameter: { c: constant, b: broken } });
    expect(verdict.met).toBe(false);
    expect(verdict.reasons[0]).toMatch(/^c is 3 in every draw/);
    expect(verdict.reasons[1]).toMatch(/^b has 1 draws? .*replica 2, draw 5/);
    expect(judgeGate({ chainsByParameter: {} }).met).toBe(false);
    expect(judgeGate({ chainsByParameter: { none: [] } }).met).toBe(false);
  });

  it('is not met where an effective size is undefined', () => {
    const chains = independent(1000, 'undefined');
    const known = { ...diagnose(chains), essTail: NaN };
    const verdict = judgeGate({ chainsByParameter: { n: chains }, diagnosisByParameter: { n: known } });
    expect(verdict.met).toBe(false);
    expect(verdict.reasons).toEqual([
      expect.stringMatching(/^The tail effective sample size of n is undefined, not above 400: .*longer/),
    ]);
  });

  it('takes a diagnosis that is known already instead of computing it again', () => {
    const chains = independent(1000, 'known');
    const known = { ...diagnose(chains), rhat: 1.5 };
    const verdict = judgeGate({ chainsByParameter: { mu1: chains }, diagnosisByParameter: { mu1: known } });
    expect(verdict.reasons).toEqual([expect.stringContaining('1.5000')]);
  });
});
