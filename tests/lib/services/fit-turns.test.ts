import { describe, expect, it } from 'vitest';
import { nextFit, turnOrder, type GroupLoad, type WaitingFit } from '@/lib/services/fit-turns';

const waits = (
  id: string,
  groupId: string,
  queuedAt: number,
  expectedSeconds = 60,
  begun = false,
): WaitingFit => ({
  kind: 'fit',
  id,
  groupId,
  begun,
  queuedAt: queuedAt * 1000,
  expectedSeconds,
});
const load = (running: number, recentSeconds = 0, limit = 2): GroupLoad => ({
  running,
  recentSeconds,
  limit,
  servedAt: null,
});
const ids = (fits: WaitingFit[]) => fits.map(({ id }) => id).join(' ');

describe('within a group', () => {
  it('a short fit comes before a long one that was queued a little earlier', () => {
    const waiting = [waits('long', 'a', 0, 3600), waits('short', 'a', 600, 30)];
    expect(ids(turnOrder(waiting, new Map(), 700e3))).toBe('short long');
  });

  it('a long fit is never passed over by what is queued later than it takes', () => {
    const waiting = [waits('long', 'a', 0, 3600), waits('late', 'a', 3601, 0)];
    expect(ids(turnOrder(waiting, new Map(), 3602e3))).toBe('long late');
  });

  it('a fit whose worker died goes on before any other begins', () => {
    const waiting = [waits('new', 'a', 0, 1), waits('begun', 'a', 500, 3600, true)];
    expect(nextFit(waiting, new Map(), 600e3)?.id).toBe('begun');
  });
});

describe('between groups', () => {
  it('the one with fewer fits running comes first, then the one that used less, then the one that waits longest', () => {
    const waiting = [waits('a1', 'a', 0), waits('b1', 'b', 1), waits('c1', 'c', 2)];
    const now = 10e3;
    expect(nextFit(waiting, new Map([['a', load(1)]]), now)?.id).toBe('b1');
    const used = new Map([
      ['a', load(0, 900)],
      ['b', load(0, 300)],
      ['c', load(0, 20)],
    ]);
    expect(ids(turnOrder(waiting, used, now))).toBe('c1 b1 a1');
    expect(ids(turnOrder(waiting, new Map(), now))).toBe('a1 b1 c1');
  });

  it('a group at its limit waits, however long, and the others go on', () => {
    const waiting = [waits('a1', 'a', 0), waits('b1', 'b', 5_000)];
    const loads = new Map([['a', load(2)]]);
    expect(nextFit(waiting, loads, 6_000e3)?.id).toBe('b1');
    expect(nextFit([waiting[0]], loads, 6_000e3)).toBeNull();
    expect(ids(turnOrder(waiting, loads, 6_000e3))).toBe('b1 a1');
  });

  it('one with many fits takes turns with one that has few', () => {
    const many = Array.from({ length: 4 }, (_, i) => waits(`a${i}`, 'a', i));
    const few = [waits('b0', 'b', 10), waits('b1', 'b', 11)];
    expect(ids(turnOrder([...many, ...few], new Map(), 20e3))).toBe('a0 b0 a1 b1 a2 a3');
  });

  it('one that used much isn’t passed over for ever by ones that come anew', () => {
    // One place, 5 000 s used of late (here without decay), and a fit of a new group every 10 s that takes 10 s.
    const loads = new Map([['heavy', load(0, 5_000)]]);
    let begun: number | null = null;
    const waiting = [waits('heavy', 'heavy', 0)];
    for (let now = 0; now < 20_000 && begun === null; now += 10) {
      waiting.push(waits(`n${now}`, `g${now}`, now, 10));
      const next = nextFit(waiting, loads, now * 1000);
      if (next?.id === 'heavy') begun = now;
      waiting.splice(waiting.indexOf(next!), 1);
    }
    expect(begun).not.toBeNull();
    expect(begun).toBeLessThanOrEqual(5_000 + 60);
  });
});
