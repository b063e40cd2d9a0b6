import { describe, expect, it } from 'vitest';
import { blockDraws, judgedFrom } from '@/lib/services/fit-schedule';
import { expectedEnd, lookFrom, unseenEnd } from '@/lib/services/fit-expectation';
import { fitHistories, type FitHistory } from '../../data/fit-histories/read';

const targets = [200, 400, 1_000, 2_000, 4_000, 8_000, 16_000].flatMap((ess) =>
  [1.01, 1.003].map((rhat) => ({ rhat, ess })),
);
type Target = (typeof targets)[number];

const isMet = ({ kept, rhat, ess, apart }: FitHistory['looks'][number], target: Target): boolean =>
  kept >= judgedFrom &&
  !apart &&
  rhat.every((each) => each !== null && each < target.rhat) &&
  ess.every((each) => each !== null && each > target.ess);

interface Told {
  fit: string;
  target: Target;
  kept: number;
  ratio: number;
}

/** What was told at the end of every block after the first tenth, over what was left, in draws. */
function toldOf(history: FitHistory, target: Target): Told[] {
  const end = history.looks.find((look) => isMet(look, target))?.kept;
  if (end === undefined) return [];
  const told: Told[] = [];
  for (let draws = blockDraws; draws < history.warmup + end; draws += blockDraws) {
    if (draws < 0.1 * (history.warmup + end)) continue;
    const kept = draws - history.warmup;
    const seen = history.looks
      .filter((look) => look.kept <= kept)
      .map((look) => ({ draws: look.kept, rhat: look.rhat, ess: look.ess }));
    const wanted =
      expectedEnd(seen, target, false) ?? unseenEnd(history.replicas, history.quantities.length, target);
    told.push({ fit: history.name, target, kept, ratio: (wanted - kept) / (end - kept) });
  }
  return told;
}

describe('the expected end of a fit', () => {
  const all = fitHistories().flatMap((history) => targets.flatMap((target) => toldOf(history, target)));

  it('is within a factor of two of the time left in 95 of 100 reports of recorded fits after their first tenth', () => {
    const astray = all.filter(({ ratio }) => !(ratio >= 0.5 && ratio <= 2));
    expect(all.length).toBeGreaterThan(1_000);
    const named = astray.map(
      ({ fit, target, kept, ratio }) => `${fit} ${target.ess}/${target.rhat} at ${kept}: ${ratio.toFixed(2)}`,
    );
    expect(astray.length / all.length, named.join('\n')).toBeLessThan(0.05);
  });

  it('tells something else than the budget for each of them', () => {
    expect(new Set(all.map(({ fit }) => fit)).size).toBeGreaterThanOrEqual(12);
  });

  it('is a look that is still to come, until the target is met', () => {
    const seen = [{ draws: 3_000, rhat: [1], ess: [390] }];
    const end = expectedEnd(seen, { rhat: 1.01, ess: 400 }, false);
    expect(end).toBe(lookFrom(3_001));
    expect(expectedEnd(seen, { rhat: 1.01, ess: 300 }, true)).toBe(3_000);
  });

  it('goes on at the rate of the slowest quantity', () => {
    const seen = [1_000, 2_000].map((draws) => ({ draws, rhat: [1, 1], ess: [draws, draws / 10] }));
    expect(expectedEnd(seen, { rhat: 1.01, ess: 1_000 }, false)).toBe(10_000);
  });

  it('can’t be told of a quantity that hardly moves', () => {
    expect(
      expectedEnd([{ draws: 500, rhat: [null], ess: [null] }], { rhat: 1.01, ess: 400 }, false),
    ).toBeNull();
    expect(expectedEnd([], { rhat: 1.01, ess: 400 }, false)).toBeNull();
  });
});
