import { describe, expect, it } from 'vitest';
import { advance, diagnose, mcseMean, rhat, startReplica } from '@/lib/sampler';
import type { JumpProposal, Target } from '@/lib/sampler';
import { correlatedNormal, phaseAtTheCut, run, truncatedPair } from './known-targets';

/** Mean and sd within 4 Monte Carlo standard errors of the exact ones, the replicas agreeing. */
function expectMoments(chains: Float64Array[], mean: number, sd: number): void {
  const found = diagnose(chains);
  expect(found.rhat).toBeLessThan(1.01);
  expect(Math.min(found.essBulk, found.essTail)).toBeGreaterThan(400);
  expect(Math.abs(found.mean - mean)).toBeLessThan(4 * found.mcseMean);
  expect(Math.abs(found.sd - sd)).toBeLessThan(4 * found.mcseSd);
}

describe('the adaptive random walk', () => {
  it('leaves a strongly correlated normal density unchanged, started far out', () => {
    const { columns, moves } = run(correlatedNormal(), [], { warmup: 2000, blocks: [] }, 'normal', 20_000);
    for (const chains of columns) expectMoments(chains, 0, 1);
    for (const [walk] of moves) {
      expect(walk.accepted / walk.proposed).toBeGreaterThan(0.15);
      expect(walk.accepted / walk.proposed).toBeLessThan(0.35);
    }
  });

  it('leaves it unchanged when it also moves blocks, and tunes single coordinates to 0.44', () => {
    const settings = { warmup: 2000, blocks: [[0], [3, 4], [1, 2]] };
    const { columns, moves } = run(correlatedNormal(), [], settings, 'blocks', 10_000);
    for (const chains of columns) expectMoments(chains, 0, 1);
    for (const [, single] of moves) {
      expect(single.name).toBe('random walk of x0');
      expect(Math.abs(single.accepted / single.proposed - 0.44)).toBeLessThan(0.1);
    }
  });

  it('takes the shape of its steps from the density', () => {
    const settings = { warmup: 4000, blocks: [] };
    const target = correlatedNormal();
    const { state } = advance(target, [], settings, startReplica(target, [], settings, 'shape', 0), 4000);
    const { factor } = state.moveState['random walk'] as { factor: Float64Array };
    for (let i = 0; i < 5; i++) {
      for (let j = 0; j <= i; j++) {
        let covariance = 0;
        for (let k = 0; k <= j; k++) covariance += factor[5 * i + k] * factor[5 * j + k];
        expect(Math.abs(covariance - 0.9 ** (i - j))).toBeLessThan(0.35);
      }
    }
  });

  it('leaves densities unchanged that end sharply', () => {
    const settings = { warmup: 1000, blocks: [[0], [1]] };
    const { columns } = run(truncatedPair(), [], settings, 'truncated', 20_000);
    expectMoments(columns[0], Math.sqrt(2 / Math.PI), Math.sqrt(1 - 2 / Math.PI));
    expectMoments(columns[1], 1, 1);
    expect(Math.min(...columns.flat().map((chain) => Math.min(...chain)))).toBeGreaterThanOrEqual(0);
  });

  it('goes round a circle: a phase that peaks at the cut has its exact mean direction and length', () => {
    const { columns } = run(phaseAtTheCut(), [], { warmup: 1000, blocks: [] }, 'circle', 20_000);
    const phases = columns[0];
    for (const chain of phases) {
      for (const phi of chain) expect(phi > -Math.PI && phi <= Math.PI).toBe(true);
    }
    const cosine = phases.map((chain) => chain.map((phi) => Math.cos(phi - Math.PI)));
    const sine = phases.map((chain) => chain.map((phi) => Math.sin(phi - Math.PI)));
    // I₁(2)/I₀(2), and ½ (1 − I₂(2)/I₀(2)) = (I₁/I₀)/2: series of the modified Bessel functions.
    const ratio = 0.697774657964008;
    expectMoments(cosine, ratio, Math.sqrt(1 - ratio / 2 - ratio * ratio));
    expectMoments(sine, 0, Math.sqrt(ratio / 2));
  });

  it('scales with what it samples: parameters a million times as large give a million times the draws', () => {
    const small = correlatedNormal();
    const large: Target = {
      ...small,
      logLikelihood: (x) => small.logLikelihood(x.map((value) => value / 2 ** 20)),
      drawPrior(rng, out) {
        small.drawPrior(rng, out);
        out.forEach((value, i) => (out[i] = value * 2 ** 20));
      },
    };
    const settings = { warmup: 500, blocks: [[1]] };
    const one = run(small, [], settings, 'scale', 500, 1).columns;
    const other = run(large, [], settings, 'scale', 500, 1).columns;
    expect(other.map(([chain]) => chain.map((x) => x / 2 ** 20))).toEqual(one.map(([chain]) => chain));
  });
});

/** Two narrow normals, 0.3 at −5 and 0.7 at 5, which no random walk of their width crosses. */
const TWO_MODES: Target = {
  names: ['x'],
  periods: [null],
  logPrior: (x) => (Math.abs(x[0]) <= 10 ? -Math.log(20) : -Infinity),
  logLikelihood: (x) =>
    Math.log(0.3 * Math.exp(-2 * (x[0] + 5) ** 2) + 0.7 * Math.exp(-2 * (x[0] - 5) ** 2) + 1e-300),
  drawPrior: (rng, out) => void (out[0] = 20 * rng.uniform() - 10),
};

/** Favours the wrong mode: N(−5, 1) with weight 0.8, else uniform over the prior. */
const LOPSIDED: JumpProposal = {
  name: 'lopsided',
  draw(rng, _from, out) {
    out[0] = rng.uniform() < 0.8 ? -5 + rng.normal() : 20 * rng.uniform() - 10;
  },
  logDensity(to) {
    const normal = Math.exp(-((to[0] + 5) ** 2) / 2) / Math.sqrt(2 * Math.PI);
    return Math.log(0.8 * normal + (Math.abs(to[0]) <= 10 ? 0.01 : 0));
  },
};

/** Multiplies by a random factor: its density depends on where it starts, 1/to times a symmetric function of ln(to/from). */
const MULTIPLY: JumpProposal = {
  name: 'multiply',
  draw(rng, from, out) {
    out[0] = from[0] * Math.exp(0.8 * rng.normal());
  },
  logDensity(to, from) {
    const step = Math.log(to[0] / from[0]) / 0.8;
    return -Math.log(to[0]) - (step * step) / 2;
  },
};

const GAMMA: Target = {
  names: ['x'],
  periods: [null],
  logPrior: (x) => (x[0] > 0 ? 0 : -Infinity),
  logLikelihood: (x) => 2 * Math.log(x[0]) - x[0],
  drawPrior: (rng, out) => void (out[0] = 10 * rng.uniform()),
};

describe('the jump', () => {
  it('gives each mode its weight although the proposal favours the other one', () => {
    const { columns } = run(TWO_MODES, [LOPSIDED], { warmup: 500, blocks: [] }, 'modes', 20_000);
    const right = columns[0].map((chain) => chain.map((x) => (x > 0 ? 1 : 0)));
    const weight = diagnose(right).mean;
    expect(Math.abs(weight - 0.7)).toBeLessThan(4 * mcseMean(right));
    expect(mcseMean(right)).toBeLessThan(0.02);
  });

  it('corrects a proposal whose density depends on the present point', () => {
    // Walks only every thousandth draw, or more seldom by the jumps accepted for one rejected: the jump alone has to be right.
    const settings = { warmup: 100, blocks: [], walkEvery: 1000 };
    const { columns, moves } = run(GAMMA, [MULTIPLY], settings, 'gamma', 40_000);
    expectMoments(columns[0], 3, Math.sqrt(3));
    const [{ accepted, proposed }] = moves[0];
    const rest = Math.round(accepted / (proposed - accepted));
    expect(rest).toBeGreaterThan(1);
    expect(moves[0].map((move) => [move.name, move.proposed])).toEqual([
      ['multiply', 40_000],
      ['random walk', 40 / rest],
    ]);
  });

  it('is what finds the modes: the walk alone leaves the replicas apart', () => {
    const { columns } = run(TWO_MODES, [], { warmup: 500, blocks: [] }, 'alone', 2000, 8);
    expect(rhat(columns[0])).toBeGreaterThan(1.5);
  });
});
