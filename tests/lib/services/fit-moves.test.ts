import { describe, expect, it } from 'vitest';
import { addEntry, emptySums } from '@/lib/sampler/log-sums';
import { evidenceInReport, movesInReport, type ReplicaFacts } from '@/lib/services/fit-moves';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';

function facts(accepted: number, entries: number): ReplicaFacts {
  const stones = emptySums(1);
  for (let i = 0; i < entries; i++) addEntry(stones, [Math.sin(i * i)]);
  return {
    moves: [
      { name: 'spectral-jump', proposed: 100, accepted },
      { name: 'swaps', proposed: 0, accepted: 0 },
    ],
    stones,
    ladder: { rungs: 10 + accepted, roundTrips: 2, rests: true },
  };
}

describe('what a report says of the moves', () => {
  it('is of all replicas together, with shares of the time', () => {
    const { acceptance, ladder } = movesInReport([facts(10, 1), facts(30, 1)], Float64Array.of(30, 10));
    expect(acceptance).toEqual([
      { move: 'spectral-jump', rate: 0.2, share: 0.75 },
      { move: 'swaps', rate: null, share: 0.25 },
    ]);
    expect(ladder).toEqual({ rungs: 40, roundTrips: 4, rests: true });
  });

  it('has no shares where nothing was timed, and no ladder where there is none', () => {
    const { acceptance, ladder } = movesInReport([{ ...facts(10, 1), ladder: null }], null);
    expect(acceptance[0].share).toBeNull();
    expect(ladder).toBeNull();
  });
});

describe('what a report says of the evidence', () => {
  it('is a value with an error of at least 15 degrees of freedom, or why there is none', () => {
    const { logEvidence, noEvidence } = evidenceInReport([facts(1, 400), facts(1, 400)], null);
    expect(logEvidence?.dof).toBeGreaterThanOrEqual(15);
    expect(noEvidence).toBeNull();
    expect(evidenceInReport([facts(1, 5), facts(1, 5)], null).noEvidence).toMatch(/fewer than 15/);
    expect(evidenceInReport([{ ...facts(1, 5), stones: null }, facts(1, 5)], null)).toEqual({
      logEvidence: null,
      noEvidence: 'the replicas are warming up',
    });
  });

  it('is the exact one where there is one', () => {
    expect(evidenceInReport([], -3.5).logEvidence?.value).toBe(-3.5);
  });
});

describe('the sampler of a snapshot', () => {
  it('is written in new ones; those without go on with walks and jumps alone', () => {
    expect(samplerSettings({ warmup: 1500 }, [[0]])).toEqual({ warmup: 1500, blocks: [[0]] });
    const { ladder, differential, walkEvery } = samplerSettings({ warmup: 1500, sampler: samplerOfNewFits }, [
      [0],
    ]);
    expect({ ladder, differential, walkEvery }).toEqual({
      ladder: samplerOfNewFits.ladder,
      differential: true,
      walkEvery: 5,
    });
  });
});
