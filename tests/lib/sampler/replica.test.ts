import { deserialize, serialize } from 'node:v8';
import { describe, expect, it } from 'vitest';
import { advance, sample, SamplerError, startReplica, stonesOf } from '@/lib/sampler';
import type { JumpProposal, ReplicaState, SamplerSettings, Target } from '@/lib/sampler';

/** A phase and two correlated numbers: circles, blocks and a jump at once. */
const TARGET: Target = {
  names: ['phi', 'a', 'b'],
  periods: [2 * Math.PI, null, null],
  logPrior: (x) => (Math.abs(x[1]) < 20 ? -Math.log(40) : -Infinity),
  logLikelihood: (x) => Math.cos(x[0] - 3) - (x[1] * x[1]) / 2 - (x[2] - x[1]) ** 2,
  drawPrior(rng, out) {
    out[0] = Math.PI * (2 * rng.uniform() - 1);
    out[1] = 40 * rng.uniform() - 20;
    out[2] = 10 * rng.normal();
  },
};

const JUMPS: JumpProposal[] = [
  {
    name: 'turn',
    draw(rng, from, out) {
      out.set(from);
      out[0] = from[0] + 2 * rng.normal();
    },
    logDensity: () => 0,
  },
];

/** Uniform over a box that holds the target: seldom accepted. */
const BOXED: JumpProposal = {
  name: 'boxed',
  normalised: true,
  draw(rng, _from, out) {
    out[0] = Math.PI * (2 * rng.uniform() - 1);
    out[1] = 8 * rng.uniform() - 4;
    out[2] = 12 * rng.uniform() - 6;
  },
  logDensity: (to) =>
    Math.abs(to[1]) <= 4 && Math.abs(to[2]) <= 6 ? -Math.log(2 * Math.PI * 8 * 12) : -Infinity,
};

/** Normals like the target: often accepted. */
const NEAR: JumpProposal = {
  name: 'near',
  normalised: true,
  draw(rng, _from, out) {
    out[0] = Math.PI * (2 * rng.uniform() - 1);
    out[1] = rng.normal();
    out[2] = out[1] + rng.normal();
  },
  logDensity: (to) => -2 * Math.log(2 * Math.PI) - (to[1] * to[1] + (to[2] - to[1]) ** 2) / 2,
};

const SETTINGS: SamplerSettings = { warmup: 600, blocks: [[0], [1, 2]] };
const TOTAL = 1500;

function inBlocks(lengths: readonly number[], store: (state: ReplicaState) => ReplicaState): Uint8Array {
  let state = startReplica(TARGET, JUMPS, SETTINGS, 'blocks', 2);
  const parts: Uint8Array[] = [];
  for (let made = 0, i = 0; made < TOTAL; i++) {
    const draws = Math.min(lengths[i % lengths.length], TOTAL - made);
    const step = advance(TARGET, JUMPS, SETTINGS, store(state), draws);
    expect(step.block.first).toBe(made);
    parts.push(new Uint8Array(step.block.values.buffer));
    state = step.state;
    made += draws;
  }
  const all = new Uint8Array(8 * 5 * TOTAL);
  parts.reduce((at, part) => (all.set(part, at), at + part.length), 0);
  return all;
}

function refusal(action: () => unknown): SamplerError {
  try {
    action();
  } catch (error) {
    if (error instanceof SamplerError) return error;
    throw error;
  }
  throw new Error('nothing was refused');
}

describe('a replica', () => {
  it('makes byte-identical draws whatever the block lengths, through stored states', () => {
    const whole = inBlocks([TOTAL], (state) => state);
    const stored = (state: ReplicaState) => deserialize(serialize(state)) as ReplicaState;
    for (const lengths of [[100], [1], [7, 593, 1, 3], [599, 2], [600]]) {
      expect(Buffer.compare(Buffer.from(inBlocks(lengths, stored)), Buffer.from(whole))).toBe(0);
    }
  });

  it.each([
    ['ladder', BOXED],
    ['jumps', NEAR],
  ])(
    'does so with ladder, archive and an evidence from the %s too, and ends in the same state',
    (from, jump) => {
      const ladder = { everyInWarmup: 2, every: 3, everyWhereJumpsDo: 7, maxRungs: 12, rejection: 0.3 };
      const settings: SamplerSettings = { ...SETTINGS, walkEvery: 3, differential: true, ladder };
      const begin = startReplica(TARGET, [jump], settings, 'all', 1);
      const whole = advance(TARGET, [jump], settings, begin, TOTAL);
      expect(stonesOf(whole.state)?.filled).toBeGreaterThan(15);
      expect(stonesOf(whole.state)).toBe(from === 'jumps' ? whole.state.stones : whole.state.ladder?.stones);
      for (const lengths of [[100], [7, 593, 1, 3], [599, 2]]) {
        let state = begin;
        const values: number[] = [];
        for (let made = 0, i = 0; made < TOTAL; i++) {
          const draws = Math.min(lengths[i % lengths.length], TOTAL - made);
          const stored = deserialize(serialize(state)) as ReplicaState;
          let ticks = 0;
          const step = advance(TARGET, [jump], settings, stored, draws, undefined, () => ticks++);
          values.push(...step.block.values);
          state = step.state;
          made += draws;
        }
        expect(values).toEqual([...whole.block.values]);
        expect(state).toEqual(whole.state);
      }
    },
  );

  it('tells the time of each move by the clock that it is given', () => {
    const start = startReplica(TARGET, JUMPS, SETTINGS, 's', 0);
    let ticks = 0;
    const made = advance(TARGET, JUMPS, SETTINGS, start, 10, undefined, () => (ticks += 5));
    // Four moves a draw, each between two looks at the clock.
    expect([...(made.milliseconds ?? [])]).toEqual([50, 50, 50, 50]);
    expect(advance(TARGET, JUMPS, SETTINGS, start, 10).milliseconds).toBeNull();
  });

  it('makes the same draws as a generator of blocks', () => {
    const start = startReplica(TARGET, JUMPS, SETTINGS, 'blocks', 2);
    const whole = advance(TARGET, JUMPS, SETTINGS, start, 300).block.values;
    const blocks = sample(TARGET, JUMPS, SETTINGS, start, 100);
    const parts = [0, 1, 2].flatMap(() => [...blocks.next().value.block.values]);
    expect(parts).toEqual([...whole]);
  });

  it('differs from the other replicas of its seed, and not between runs', () => {
    const draws = (replica: number) =>
      advance(TARGET, JUMPS, SETTINGS, startReplica(TARGET, JUMPS, SETTINGS, 's', replica), 50).block.values;
    expect(draws(0)).toEqual(draws(0));
    expect(draws(0)).not.toEqual(draws(1));
  });

  it('leaves the state that it was given as it was', () => {
    const start = startReplica(TARGET, JUMPS, SETTINGS, 's', 0);
    const before = structuredClone(start);
    advance(TARGET, JUMPS, SETTINGS, start, 100);
    expect(start).toEqual(before);
  });

  it('records likelihood, prior and parameters of each draw in this order', () => {
    const { block, state } = advance(
      TARGET,
      JUMPS,
      SETTINGS,
      startReplica(TARGET, JUMPS, SETTINGS, 's', 3),
      40,
    );
    expect([block.replica, block.first, block.count, block.width]).toEqual([3, 0, 40, 5]);
    for (let row = 0; row < 40; row++) {
      const x = block.values.slice(5 * row + 2, 5 * row + 5);
      expect(block.values[5 * row]).toBe(TARGET.logLikelihood(x));
      expect(block.values[5 * row + 1]).toBe(TARGET.logPrior(x));
    }
    expect(block.values.slice(-3)).toEqual(state.x);
  });

  it('adapts in warm-up and not after it', () => {
    const at = (draws: number) =>
      advance(TARGET, JUMPS, SETTINGS, startReplica(TARGET, JUMPS, SETTINGS, 's', 0), draws).state;
    const end = at(600);
    expect(at(599).moveState).not.toEqual(end.moveState);
    expect(at(100).moveState).not.toEqual(end.moveState);
    expect(at(601).moveState).toEqual(end.moveState);
    expect(at(1500).moveState).toEqual(end.moveState);
  });

  it('counts acceptances anew from the end of warm-up', () => {
    const { state } = advance(TARGET, JUMPS, SETTINGS, startReplica(TARGET, JUMPS, SETTINGS, 's', 0), 650);
    expect(state.moves.map((move) => move.name)).toEqual([
      'turn',
      'random walk',
      'random walk of phi',
      'random walk of a, b',
    ]);
    for (const move of state.moves) {
      expect(move.proposed).toBe(50);
      expect(move.accepted).toBeGreaterThan(0);
      expect(move.accepted).toBeLessThan(50);
    }
  });

  it('ends a block early when asked to, at a state from which the draws go on unchanged', () => {
    const start = startReplica(TARGET, JUMPS, SETTINGS, 's', 0);
    let asked = 0;
    const cut = advance(TARGET, JUMPS, SETTINGS, start, 100, () => ++asked > 30);
    expect(cut.block.count).toBe(30);
    expect(cut.state.draws).toBe(30);
    const rest = advance(TARGET, JUMPS, SETTINGS, cut.state, 70);
    const whole = advance(TARGET, JUMPS, SETTINGS, start, 100);
    expect([...cut.block.values, ...rest.block.values]).toEqual([...whole.block.values]);
    expect(rest.state).toEqual(whole.state);
  });

  it('starts at a point of the prior where the likelihood is finite', () => {
    let calls = 0;
    const picky: Target = { ...TARGET, logLikelihood: (x) => (++calls > 400 && x[1] > 0 ? 0 : -Infinity) };
    const state = startReplica(picky, [], { warmup: 0, blocks: [] }, 'start', 0);
    expect(calls).toBeGreaterThan(400);
    expect(state.x[1]).toBeGreaterThan(0);
    expect(state.logLikelihood).toBe(0);
  });

  it('gives up a start after 1000 draws from the prior', () => {
    let calls = 0;
    const hopeless: Target = { ...TARGET, logLikelihood: () => (calls++, -Infinity) };
    const error = refusal(() => startReplica(hopeless, [], { warmup: 0, blocks: [] }, 'start', 0));
    expect(error.code).toBe('no-start');
    expect(error.message).toMatch(/priors overlap/);
    expect(calls).toBe(1000);
  });
});

describe('a target or proposal that has no value', () => {
  const plain = { warmup: 0, blocks: [] };
  const start = startReplica(TARGET, [], plain, 'faults', 0);
  const [phi, a, b] = start.x;

  it('stops the run and names the term and the parameter values', () => {
    for (const [term, part] of [
      ['likelihood', { logLikelihood: () => NaN }],
      ['prior', { logPrior: () => NaN }],
    ] as const) {
      const error = refusal(() => advance({ ...TARGET, ...part }, [], plain, start, 10));
      expect(error.code).toBe('not-a-number');
      expect(error.message).toMatch(
        new RegExp(`^The log ${term} is not a number at phi = \\S+, a = \\S+, b = \\S+\\. `),
      );
    }
  });

  it('stops at the start too', () => {
    const broken = { ...TARGET, logLikelihood: () => NaN };
    expect(refusal(() => startReplica(broken, [], plain, 's', 0)).code).toBe('not-a-number');
  });

  it('stops where a density is infinite', () => {
    const spike = { ...TARGET, logLikelihood: () => Infinity };
    expect(refusal(() => advance(spike, [], plain, start, 100)).code).toBe('infinite-density');
  });

  it.each([
    [NaN, 'not-a-number'],
    [-Infinity, 'impossible-proposal'],
    [Infinity, 'impossible-proposal'],
  ])('stops where a proposal gives its own draw the log density %d', (value, code) => {
    const jump: JumpProposal = {
      name: 'faulty',
      draw: (_rng, from, out) => void out.set(from),
      logDensity: () => value,
    };
    const state = startReplica(TARGET, [jump], plain, 'faults', 0);
    const error = refusal(() => advance(TARGET, [jump], plain, state, 1));
    expect(error.code).toBe(code);
    expect(error.message).toContain('“faulty”');
    expect(error.message).toContain(`phi = ${phi}, a = ${a}, b = ${b}`);
  });

  it('rejects a jump from which there is no way back', () => {
    const oneWay: JumpProposal = {
      name: 'one way',
      draw: (_rng, from, out) => void from.forEach((value, i) => (out[i] = i === 1 ? 0.5 : value)),
      logDensity: (to) => (to[1] === 0.5 ? 0 : -Infinity),
    };
    const state = startReplica(TARGET, [oneWay], plain, 'faults', 0);
    expect(advance(TARGET, [oneWay], plain, state, 20).state.moves[0]).toEqual({
      name: 'one way',
      proposed: 20,
      accepted: 0,
    });
  });
});

describe('settings and states that make no sense', () => {
  it.each([
    ['warm-up', { warmup: -1, blocks: [] }, /Warm-up of -1/],
    ['a block beyond the parameters', { warmup: 1, blocks: [[3]] }, /block \[3\].*0 to 2/],
    ['a block that names a parameter twice', { warmup: 1, blocks: [[1, 1]] }, /different parameters/],
    ['an empty block', { warmup: 1, blocks: [[]] }, /must list/],
    ['one block twice', { warmup: 1, blocks: [[1], [1]] }, /share a name/],
    ['walks that sit out without a jump', { warmup: 1, blocks: [], walkEvery: 2 }, /walkEvery to 1/],
  ])('are refused: %s', (_what, settings, message) => {
    const error = refusal(() => startReplica(TARGET, [], settings, 's', 0));
    expect(error.code).toBe('wrong-settings');
    expect(error.message).toMatch(message);
  });

  it('are refused: a target without parameters, two jumps of one name, blocks of no length', () => {
    const nothing = { ...TARGET, names: [], periods: [] };
    const plain = { warmup: 0, blocks: [] };
    expect(refusal(() => startReplica(nothing, [], plain, 's', 0)).message).toMatch(/no parameter/);
    expect(refusal(() => startReplica(TARGET, [JUMPS[0], JUMPS[0]], plain, 's', 0)).code).toBe(
      'wrong-settings',
    );
    const state = startReplica(TARGET, [], plain, 's', 0);
    expect(refusal(() => advance(TARGET, [], plain, state, 0.5)).code).toBe('wrong-settings');
    expect(refusal(() => sample(TARGET, [], plain, state, 0).next()).code).toBe('wrong-settings');
  });

  it('are refused: the state of a run with other moves or another warm-up', () => {
    const state = startReplica(TARGET, JUMPS, SETTINGS, 's', 0);
    expect(refusal(() => advance(TARGET, [], SETTINGS, state, 1)).code).toBe('wrong-state');
    expect(refusal(() => advance(TARGET, JUMPS, { ...SETTINGS, warmup: 5 }, state, 1)).code).toBe(
      'wrong-state',
    );
    expect(refusal(() => advance(TARGET, JUMPS, { ...SETTINGS, blocks: [] }, state, 1)).message).toMatch(
      /anew/,
    );
  });
});
