import { describe, expect, it } from 'vitest';
import { squeezedCoefficient } from '@/lib/templates';
import { judgeRanks, rankDataset, type CalibrationProblem } from '@/lib/inference/calibration';
import { cases, problemOf, type Fault } from './calibration-cases';
import { firstCoefficient } from './calibration-formulas';
import { proof } from './proof';

const L = 99;
const ALPHA = 0.01;

/** Ranks of every quantity over the datasets, judged, with what a record of them needs. */
function calibrate(problem: CalibrationProblem, datasets: number, seed: string) {
  const ranks: Record<string, number[]> = {};
  let short = 0;
  let made = 0;
  for (let k = 0; k < datasets; k += 1) {
    const found = rankDataset(problem, L, seed, k);
    if (!found.reached) short += 1;
    made += found.made / datasets;
    for (const [name, rank] of Object.entries(found.ranks)) (ranks[name] ??= []).push(rank);
  }
  const { band, quantities, calibrated } = judgeRanks(ranks, L, ALPHA);
  const rows = quantities.map(({ name, outside, locationZ, chiSquare, shape }) => ({
    name,
    outside,
    locationZ,
    chiSquare,
    shape,
  }));
  return { calibrated, short, drawsMade: made, draws: L, alpha: ALPHA, coverage: band.coverage, rows };
}

const isOut = ({ outside }: { outside: number }): boolean => outside > 0;

describe('calibration by simulation', () => {
  for (const each of cases) {
    proof(
      {
        name: `calibration-${each.name}`,
        claim: `posteriors of ${each.name} hold truths as often as they say: all ranks within bands at a family-wise 1 %`,
        unit: 'simulated datasets',
        gate: 40,
        full: 400,
        seed: 20264,
      },
      ({ size, seed, record }) => {
        const found = calibrate(problemOf(each), size, `${seed}/${each.name}`);
        record(found);
        expect(found.short).toBe(0);
        expect(found.rows.filter(isOut)).toEqual([]);
      },
    );
  }

  const faults: readonly [Fault, string, string, number][] = [
    ['phase', 'free-phase-one', 'a likelihood with the phase turned by 0.5 rad', 60],
    ['ignored', 'free-phase-one', 'a likelihood that is ignored', 60],
    ['covariance', 'free-phase-two', 'a covariance of 0.8 of the true one', 280],
  ];
  for (const [fault, of, words, gate] of faults) {
    proof(
      {
        name: `calibration-fault-${fault}`,
        claim: `${words} leaves the bands that calibrated ranks keep within`,
        unit: 'simulated datasets',
        gate,
        full: 400,
        seed: 20265,
      },
      ({ size, seed, record }) => {
        const sound = cases.find(({ name }) => name === of);
        if (!sound) throw new Error('no such case');
        const found = calibrate(problemOf(sound, fault), size, `${seed}/${fault}`);
        record(found);
        expect(found.rows.filter(isOut)).not.toEqual([]);
        // A posterior that ignores the data is its prior, which ranks parameters well: only the likelihood tells.
        if (fault === 'ignored')
          expect(found.rows.find(({ name }) => name === 'log likelihood')?.outside).toBeGreaterThan(0);
      },
    );
  }

  it('ranks a dataset by seed and number alone', () => {
    const again = () => rankDataset(problemOf(cases[0]), L, 'alone', 7);
    const first = again();
    rankDataset(problemOf(cases[0]), L, 'alone', 3);
    expect(again()).toEqual(first);
    expect(rankDataset(problemOf(cases[0]), L, 'alone', 8).ranks).not.toEqual(first.ranks);
  });

  it('simulates with formulas that agree with the program’s', () => {
    for (const mu of [0.2, 1, 2.7, 6]) {
      const { re, im } = squeezedCoefficient(mu, 1);
      const [a, b] = firstCoefficient(mu);
      expect(Math.hypot(a - re, b - im) / Math.hypot(re, im)).toBeLessThan(1e-11);
    }
  });
});
