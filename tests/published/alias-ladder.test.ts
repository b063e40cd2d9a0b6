import { describe, expect, it } from 'vitest';
import { advance, mcseMean, startReplica } from '@/lib/sampler';
import { freePhaseModel } from './free-phase-models';
import alias from './data/posteriors/alias.json';

/** Weights of the modes: derived by us (data/posteriors/README.md). */
describe('a frequency and its aliases, every replica and every rung started in one mode, without jumps', () => {
  it('the ladder reaches the other modes, each to its weight within 4 MCSE', { timeout: 120_000 }, () => {
    const { target, blocks } = freePhaseModel(alias, 1);
    const ladder = { everyInWarmup: 1, every: 1, everyWhereJumpsDo: 1, maxRungs: 24, rejection: 0.35 };
    const settings = { warmup: 1500, blocks, differential: true, ladder };
    const [{ mu_lo: from, mu_hi: to }] = alias.exact.one.modes;
    // At 16 000 the error of the larger modes scatters between seeds from 0.03 to 0.09: too few for the bound on it below.
    const kept = 32_000;
    const runs = [0, 1, 2, 3].map((replica) => {
      const start = startReplica(target, [], settings, 'one mode', replica);
      // The peak of the first mode, for chain and rungs alike.
      start.x.set([4, 0.35, 0.2, 0.2]);
      start.logPrior = target.logPrior(start.x);
      start.logLikelihood = target.logLikelihood(start.x);
      const { x, logPrior, logLikelihood } = start;
      start.ladder?.points.forEach((_, k, points) => {
        points[k] = { x: x.slice(), logPrior, logLikelihood };
      });
      expect(x[0] > from && x[0] < to).toBe(true);
      const warm = advance(target, [], settings, start, settings.warmup).state;
      return advance(target, [], settings, warm, kept);
    });
    expect(target.names).toEqual(['mu1', 'a1', 'b1', 'c1']);
    for (const { state } of runs) expect(state.ladder?.roundTrips).toBeGreaterThan(50);
    for (const { mu_lo: lo, mu_hi: hi, weight } of alias.exact.one.modes) {
      const inside = runs.map(({ block }) =>
        Float64Array.from({ length: kept }, (_, k) => {
          const mu = block.values[k * block.width + 2];
          return mu > lo && mu <= hi ? 1 : 0;
        }),
      );
      const found = inside.flatMap((chain) => [...chain]).reduce((sum, each) => sum + each, 0) / (4 * kept);
      // A mode of negligible weight may not be visited at all: then the error is that of independent draws.
      const error = Math.max(mcseMean(inside) || 0, Math.sqrt((weight * (1 - weight)) / (4 * kept)));
      expect(Math.abs(found - weight) / error, `mode ${lo} to ${hi}`).toBeLessThan(4);
      expect(error).toBeLessThan(0.05);
    }
  });
});
