import { describe, expect, it } from 'vitest';
import {
  advance,
  barrierOf,
  diagnose,
  evidenceOf,
  mcseMean,
  rejectionRates,
  startReplica,
  stonesOf,
} from '@/lib/sampler';
import type { JumpProposal, LadderSettings, ReplicaState, SamplerSettings, Target } from '@/lib/sampler';
import { placeRungs } from '@/lib/sampler/ladder';
import {
  freezeArchive,
  remember,
  initDifferential,
  stepDifferential,
} from '@/lib/sampler/moves/differential';
import { createCandidate, evaluate } from '@/lib/sampler/point';
import { createRng } from '@/lib/sampler/rng';
import { run } from './known-targets';

const LADDER: LadderSettings = {
  everyInWarmup: 1,
  every: 1,
  everyWhereJumpsDo: 1,
  maxRungs: 24,
  rejection: 0.35,
};

/** Two normals of unit prior and a likelihood exp(−r²/2s²): everything about its ladder has a closed form. */
function narrowing(s: number): Target {
  return {
    names: ['x', 'y'],
    periods: [null, null],
    logPrior: ([x, y]) => -(x * x + y * y) / 2 - Math.log(2 * Math.PI),
    logLikelihood: ([x, y]) => -(x * x + y * y) / (2 * s * s),
    drawPrior(rng, out) {
      out[0] = rng.normal();
      out[1] = rng.normal();
    },
  };
}

function states(target: Target, settings: SamplerSettings, seed: string, kept: number): ReplicaState[] {
  return [0, 1, 2, 3].map((replica) => {
    const start = startReplica(target, [], settings, seed, replica);
    return advance(target, [], settings, start, settings.warmup + kept).state;
  });
}

const ladderOf = (state: ReplicaState) => {
  if (!state.ladder) throw new Error('no ladder');
  return state.ladder;
};
const evidenceFrom = (found: readonly ReplicaState[]) => {
  const evidence = evidenceOf(found.flatMap((state) => stonesOf(state) ?? []));
  if (!('value' in evidence)) throw new Error(evidence.because);
  return evidence;
};

describe('the ladder', () => {
  const s = 0.01;
  const found = states(narrowing(s), { warmup: 1500, blocks: [], ladder: LADDER }, 'barrier', 4000);

  it('measures the barrier of a normal: −ln L s² is exponential of rate 1 + β/s² in two dimensions, so Λ = ½ ln(1 + 1/s²)', () => {
    const exact = Math.log1p(1 / (s * s)) / 2;
    for (const state of found) expect(Math.abs(barrierOf(ladderOf(state)) / exact - 1)).toBeLessThan(0.06);
  });

  it('makes all pairs reject alike, no more than asked for, with as few rungs as that takes', () => {
    for (const state of found) {
      const ladder = ladderOf(state);
      const rates = rejectionRates(ladder);
      expect(Math.max(...rates) - Math.min(...rates)).toBeLessThan(0.15);
      expect(Math.max(...rates)).toBeLessThan(0.45);
      // The barrier that the number follows from is known to a tenth within warm-up.
      expect(Math.abs(ladder.betas.length - 1 - Math.ceil(4.605 / 0.35))).toBeLessThanOrEqual(2);
    }
  });

  it('gives the evidence 1/(1 + 1/s²) within its error, which is small', () => {
    const evidence = evidenceFrom(found);
    expect(evidence.error).toBeLessThan(0.06);
    expect(evidence.dof).toBeGreaterThanOrEqual(15);
    expect(Math.abs(evidence.value + Math.log1p(1 / (s * s))) / evidence.error).toBeLessThan(4);
  });

  it('counts ways to the prior and back', () => {
    // Non-reversible swaps come round at least every 2 + 2 Λ/(1 − r) steps on average, times the two halves of a trip.
    for (const state of found) expect(ladderOf(state).roundTrips).toBeGreaterThan(4000 / 100);
  });

  it('stays as it is after warm-up', () => {
    const settings = { warmup: 400, blocks: [], ladder: LADDER };
    const target = narrowing(0.1);
    const end = advance(target, [], settings, startReplica(target, [], settings, 'still', 0), 400).state;
    const later = advance(target, [], settings, end, 300).state;
    expect(ladderOf(later).betas).toEqual(ladderOf(end).betas);
    expect(ladderOf(later).walks).toEqual(ladderOf(end).walks);
    expect(ladderOf(later).stones).not.toEqual(ladderOf(end).stones);
  });

  it('has no more rungs than are allowed, however high the barrier', () => {
    const settings = { warmup: 600, blocks: [], ladder: { ...LADDER, maxRungs: 5 } };
    const [state] = states(narrowing(1e-4), settings, 'few', 100);
    expect(ladderOf(state).betas).toHaveLength(5);
  });

  it('places rungs at equal steps of the barrier', () => {
    const placed = placeRungs(Float64Array.of(0, 0.5, 1), Float64Array.of(0.6, 0.2), {
      ...LADDER,
      rejection: 0.2,
    });
    expect(placed).toHaveLength(5);
    [0, 0.5 / 3, 1 / 3, 0.5, 1].forEach((beta, k) => expect(placed[k]).toBeCloseTo(beta, 12));
  });

  it('finds both modes where the walk alone doesn’t, in their proportion, from a start in one', () => {
    const modes: Target = {
      names: ['x'],
      periods: [null],
      logPrior: (x) => (Math.abs(x[0]) <= 10 ? -Math.log(20) : -Infinity),
      logLikelihood: (x) =>
        Math.log(0.3 * Math.exp(-2 * (x[0] + 5) ** 2) + 0.7 * Math.exp(-2 * (x[0] - 5) ** 2)),
      drawPrior: (rng, out) => void (out[0] = 20 * rng.uniform() - 10),
    };
    const { columns } = run(modes, [], { warmup: 1000, blocks: [], ladder: LADDER }, 'modes', 10_000);
    const right = columns[0].map((chain) => chain.map((x) => (x > 0 ? 1 : 0)));
    expect(Math.abs(diagnose(right).mean - 0.7)).toBeLessThan(4 * mcseMean(right));
    expect(mcseMean(right)).toBeLessThan(0.02);
  });

  it('bears a likelihood of 0 over a part of the prior', () => {
    const half: Target = {
      ...narrowing(0.3),
      logLikelihood: ([x, y]) => (x > 0 ? -(x * x + y * y) / 0.18 : -Infinity),
    };
    const evidence = evidenceFrom(states(half, { warmup: 600, blocks: [], ladder: LADDER }, 'half', 3000));
    expect(Math.abs(evidence.value - Math.log(0.5 / (1 + 1 / 0.09))) / evidence.error).toBeLessThan(4);
  });

  it('gives the evidence of a power of the likelihood, where evidences are of another one than is sampled', () => {
    const s2 = 0.04;
    const target: Target = { ...narrowing(Math.sqrt(s2)), evidence: { exponent: 1.2, offset: 7 } };
    const evidence = evidenceFrom(states(target, { warmup: 600, blocks: [], ladder: LADDER }, 'power', 4000));
    expect(Math.abs(evidence.value - 7 + Math.log1p(1.2 / s2)) / evidence.error).toBeLessThan(4);
  });

  it('stops where the likelihood isn’t a number on any rung, and names term and values', () => {
    // Only the prior's rung comes to where it has no value.
    const broken: Target = {
      ...narrowing(0.01),
      logLikelihood: ([x, y]) => (x > 2.5 ? NaN : -(x * x + y * y) / 2e-4),
    };
    const settings = { warmup: 1000, blocks: [], ladder: LADDER };
    expect(() => states(broken, settings, 'broken', 3000)).toThrow(
      /^The log likelihood is not a number at x = \S+, y = \S+\. /,
    );
  });

  it.each([
    [{ every: 0 }, /every 0 draws/],
    [{ maxRungs: 2 }, /at most 2 rungs/],
    [{ rejection: 1 }, /rejected to 1/],
  ])('is refused where it makes no sense: %o', (part, message) => {
    const settings = { warmup: 500, blocks: [], ladder: { ...LADDER, ...part } };
    expect(() => startReplica(narrowing(1), [], settings, 's', 0)).toThrow(message);
    const short = { warmup: 100, blocks: [], ladder: LADDER };
    expect(() => startReplica(narrowing(1), [], short, 's', 0)).toThrow(/100 draws of warm-up/);
  });
});

describe('a normalised jump', () => {
  const s = 0.05;
  /** Normals somewhat wider than the posterior. */
  const jump: JumpProposal = {
    name: 'wide',
    normalised: true,
    draw(rng, _from, out) {
      out[0] = 1.3 * s * rng.normal();
      out[1] = 1.3 * s * rng.normal();
    },
    logDensity: ([x, y]) => -(x * x + y * y) / (2 * (1.3 * s) ** 2) - Math.log(2 * Math.PI * (1.3 * s) ** 2),
  };

  it('gives the evidence far better than a ladder, which rests then', () => {
    const target: Target = { ...narrowing(s), evidence: { exponent: 1.1, offset: -3 } };
    const ladder = { ...LADDER, everyWhereJumpsDo: 100 };
    const found = [0, 1, 2, 3].map((replica) => {
      const settings = { warmup: 600, blocks: [], ladder };
      return advance(target, [jump], settings, startReplica(target, [jump], settings, 'near', replica), 4600)
        .state;
    });
    for (const { rest = 0, moves, ...state } of found) {
      const [{ accepted, proposed }] = moves;
      // Accepted for one rejected; warm-up's 600 jumps know it to a tenth or so.
      expect(Math.abs(rest / (accepted / (proposed - accepted)) - 1)).toBeLessThan(0.4);
      const due = Array.from({ length: 4000 }, (_, k) => 600 + k).filter((draw) => draw % (100 * rest) === 0);
      expect([ladderOf({ ...state, moves }).steps, ladderOf({ ...state, moves }).stones]).toEqual([
        due.length,
        null,
      ]);
    }
    const evidence = evidenceFrom(found);
    expect(evidence.error).toBeLessThan(0.01);
    expect(Math.abs(evidence.value + 3 + Math.log1p(1.1 / (s * s))) / evidence.error).toBeLessThan(4);
  });
});

describe('differential evolution', () => {
  /** A phase that peaks at the cut of its circle, and a normal that goes with it. */
  const target: Target = {
    names: ['phi', 'a'],
    periods: [2 * Math.PI, null],
    logPrior: () => 0,
    logLikelihood: ([phi, a]) => 2 * Math.cos(phi - Math.PI) - (a - Math.sin(phi)) ** 2 / 2,
    drawPrior: () => undefined,
  };

  it('leaves a known density unchanged by itself, whatever its archive holds', () => {
    const rng = createRng('archive');
    const chains = [0, 1, 2, 3].map(() => {
      const state = initDifferential(2);
      // Far wider than the target, and off it.
      for (let draw = 1; draw <= 400; draw++) {
        remember(state, Float64Array.of(Math.PI * (2 * rng.uniform() - 1), 3 + 2 * rng.normal()), draw, 400);
      }
      freezeArchive(state, target.periods);
      expect(state.size).toBe(200);
      const point = createCandidate(2);
      evaluate(target, point);
      const candidate = createCandidate(2);
      const draws = { cosine: new Float64Array(30_000), a: new Float64Array(30_000) };
      for (let i = -500; i < 30_000; i++) {
        stepDifferential(rng, target, point, candidate, state);
        if (i < 0) continue;
        draws.cosine[i] = Math.cos(point.x[0] - Math.PI);
        draws.a[i] = point.x[1];
      }
      return draws;
    });
    // I₁(2)/I₀(2), and Var a = 1 + E sin² = 1 + (I₁/I₀)/2: series of the modified Bessel functions.
    const ratio = 0.697774657964008;
    const expected = [
      { of: chains.map(({ cosine }) => cosine), mean: ratio, sd: Math.sqrt(1 - ratio / 2 - ratio * ratio) },
      { of: chains.map(({ a }) => a), mean: 0, sd: Math.sqrt(1 + ratio / 2) },
    ];
    for (const { of, mean, sd } of expected) {
      const found = diagnose(of);
      expect(found.rhat).toBeLessThan(1.01);
      expect(Math.abs(found.mean - mean)).toBeLessThan(4 * found.mcseMean);
      expect(Math.abs(found.sd - sd)).toBeLessThan(4 * found.mcseSd);
    }
  });

  it('takes its archive from the second half of warm-up of its own replica, and lets it be after that', () => {
    const settings = { warmup: 600, blocks: [], differential: true };
    const at = (draws: number) => {
      const start = startReplica(narrowing(0.5), [], settings, 'own', 0);
      return advance(narrowing(0.5), [], settings, start, draws);
    };
    const { block, state } = at(600);
    const held = state.moveState['differential evolution'] as { archive: Float64Array; size: number };
    expect(held.size).toBe(150);
    const drawn = Array.from({ length: 150 }, (_, k) => (301 + 2 * k) * block.width + 2);
    drawn.forEach((offset, k) => {
      expect([...held.archive.slice(2 * k, 2 * k + 2)]).toEqual([...block.values.slice(offset, offset + 2)]);
    });
    const later = at(900).state;
    expect(later.moveState['differential evolution']).toEqual(held);
    const { proposed, accepted } = later.moves[1];
    expect(proposed).toBe(300);
    expect(accepted / proposed).toBeGreaterThan(0.1);
  });
});
