import { describe, expect, it } from 'vitest';
import { tellTime, timeInWords, type TimeTold } from '@/components/words/time-left';
import { createRng } from '@/lib/sampler';

/** What is told second by second of these estimates, in milliseconds from 0 on. */
function toldOf(estimates: readonly number[], every = 1_000): TimeTold[] {
  const told: TimeTold[] = [];
  estimates.forEach((given, i) =>
    told.push(tellTime(told.at(-1) ?? null, { of: 'a', given, at: i * every })),
  );
  return told;
}
const changes = (told: readonly TimeTold[]): number[] =>
  told.map(({ shown }) => shown).filter((shown, i, all) => i > 0 && shown !== all[i - 1]);

describe('the time left that is told', () => {
  it('is rounded to what can be known', () => {
    const words = (given: number) => timeInWords(tellTime(null, { of: 'a', given, at: 0 }));
    expect([0, 3, 9, 23, 44, 58, 71, 100, 200, 400, 1_300, 7_000].map(words)).toEqual([
      'about 5 s',
      'about 5 s',
      'about 10 s',
      'about 20 s',
      'about 40 s',
      'about 1 min',
      'about 1 min',
      'about 1 min 30 s',
      'about 3 min',
      'about 7 min',
      'about 20 min',
      'about 2 h',
    ]);
  });

  it('goes down step by step and never up while estimates waver by a fifth', () => {
    const rng = createRng('wavering');
    for (let run = 0; run < 50; run++) {
      const estimates = Array.from({ length: 300 }, (_, i) => (300 - i) * (0.8 + 0.4 * rng.uniform()));
      const told = toldOf(estimates);
      const ups = told.filter(({ shown }, i) => i > 0 && shown > told[i - 1].shown);
      expect(ups.length).toBeLessThanOrEqual(1);
      // 5 min to 5 s is 17 steps.
      expect(changes(told).length).toBeLessThanOrEqual(20);
      told.forEach(({ shown }, i) => {
        const left = 300 - i;
        if (left >= 10) expect(Math.abs(Math.log2(shown / left))).toBeLessThan(1);
      });
    }
  });

  it('doesn’t flicker at the border of a unit', () => {
    const estimates = Array.from({ length: 60 }, (_, i) => (i % 2 ? 54 : 66) + 0.1 * i);
    // The estimate runs ahead of the clock, so it is held where it is.
    expect(changes(toldOf(estimates)).length).toBeLessThanOrEqual(2);
  });

  it('tells news at once: another fit, and a time that is twice or half what it was', () => {
    const before = tellTime(null, { of: 'a', given: 60, at: 0 });
    expect(tellTime(before, { of: 'b', given: 70, at: 10 }).shown).toBe(60);
    expect(tellTime(before, { of: 'b', given: 300, at: 10 }).shown).toBe(300);
    expect(tellTime(before, { of: 'a', given: 300, at: 10 }).shown).toBe(300);
    expect(tellTime(before, { of: 'a', given: 15, at: 10 }).shown).toBe(15);
  });
});
