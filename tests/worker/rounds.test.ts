import { describe, expect, it } from 'vitest';
import { Pace } from '@/worker/pace';
import { Rounds } from '@/worker/rounds';
import type { Turn } from '@/worker/messages';

const course = { warmup: 1500, blockDraws: 500 };

/** Replicas that answer when they are told to; `asked` lists what was asked for, as replica and draws. */
function puppets(draws: number, limit: number, replicas = 2) {
  const at = new Array<number>(replicas).fill(draws);
  const asked: [number, number][] = [];
  const pending: {
    replica: number;
    count: number;
    settle: (turn: Turn) => void;
    fail: (error: Error) => void;
  }[] = [];
  const rounds = new Rounds({
    replicas,
    draws,
    limit,
    course,
    advance: (replica, count) => {
      asked.push([replica, count]);
      return new Promise((settle, fail) => pending.push({ replica, count, settle, fail }));
    },
  });
  /** Lets one replica (or the first that waits) finish its turn. */
  const finish = async (replica?: number) => {
    const index = pending.findIndex((each) => replica === undefined || each.replica === replica);
    const [turn] = pending.splice(index, 1);
    const first = at[turn.replica];
    at[turn.replica] += turn.count;
    turn.settle({
      kind: 'turn',
      replica: turn.replica,
      first,
      count: turn.count,
      width: 0,
      values: new Float64Array(0),
      state: new Uint8Array(0),
      facts: { moves: [], stones: null, ladder: null },
      milliseconds: null,
    });
    await Promise.resolve();
  };
  return { rounds, asked, pending, finish };
}

describe('rounds of replicas', () => {
  it('are handed out when every replica has made its turn, in order, and not past a look', async () => {
    const { rounds, finish } = puppets(1000, 9000);
    const taking = rounds.take();
    for (let i = 0; i < 3; i++) await finish(0);
    for (let i = 0; i < 3; i++) await finish(1);
    const first = await taking;
    expect(first.map(({ from, to }) => [from, to])).toEqual([[1000, 1500]]);
    const second = await rounds.take();
    expect(second.map(({ from, to }) => [from, to])).toEqual([[1500, 2000]]);
    expect(second[0].turns.map(({ replica, first: start }) => [replica, start])).toEqual([
      [0, 1500],
      [1, 1500],
    ]);
  });

  it('let a fast replica run ahead by eight turns and no further', async () => {
    const { asked, pending, finish } = puppets(0, 100_000);
    for (let i = 0; i < 8; i++) await finish(0);
    expect(asked.filter(([replica]) => replica === 0)).toHaveLength(8);
    expect(pending.map(({ replica }) => replica)).toEqual([1]);
  });

  it('end alike for all replicas where the budget is raised between their turns', async () => {
    const { rounds, asked, finish } = puppets(1500, 1730);
    await finish(0);
    rounds.raise(9000);
    await finish(1);
    expect((await rounds.take()).map(({ from, to }) => [from, to])).toEqual([[1500, 1730]]);
    expect(asked).toEqual([
      ...[
        [0, 230],
        [1, 230],
      ],
      ...[
        [0, 270],
        [1, 270],
      ],
    ]);
  });

  it('stop at the budget', async () => {
    const { asked, finish, pending } = puppets(1500, 1730);
    await finish();
    await finish();
    expect(asked).toHaveLength(2);
    expect(pending).toEqual([]);
  });

  it('pass on what stopped a replica', async () => {
    const { rounds, pending } = puppets(0, 500);
    const taking = rounds.take();
    pending[1].fail(new Error('not a number'));
    await expect(taking).rejects.toThrow('not a number');
  });
});

describe('the pace of a fit', () => {
  it('is of all replicas together over the last ten seconds', () => {
    let now = 0;
    const pace = new Pace(() => now, 4, 1000);
    const mark = (at: number, draws: number) => {
      now = at;
      return pace.mark(draws);
    };
    expect(mark(2000, 1500)).toEqual({ milliseconds: 2000, drawsPerSecond: 1000 });
    expect(mark(10_000, 1700)).toEqual({ milliseconds: 8000, drawsPerSecond: 280 });
    expect(mark(14_000, 2900)).toEqual({ milliseconds: 4000, drawsPerSecond: (4 * 1400) / 12 });
  });
});
