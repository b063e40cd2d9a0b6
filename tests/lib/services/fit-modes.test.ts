import { describe, expect, it } from 'vitest';
import { FitModes, independentDraws } from '@/lib/services/fit-modes';
import { judgedFrom, warmupDraws } from '@/lib/services/fit-schedule';
import { madeUpSpec } from '../inference/fixtures';

const snapshot = { seed: 'modes of a fit', warmup: warmupDraws, replicas: 4 };

describe('what the modes of a fit are compared with', () => {
  it('is an independent run for three fields, which grows with the draws and is the same after a resume', () => {
    const spec = madeUpSpec('free-phase', { fields: 3, background: [1] });
    const modes = new FitModes(spec, snapshot);
    expect(modes.at(judgedFrom - 1)).toBeNull();
    const first = modes.at(judgedFrom);
    expect(first).toMatchObject({ by: 'run', names: ['mu1', 'mu2', 'mu3'] });
    const later = modes.at(4 * judgedFrom);
    expect(later).not.toEqual(first);
    expect(new FitModes(spec, snapshot).at(4 * judgedFrom)).toEqual(later);
  });

  it('is a scan for one field', () => {
    const modes = new FitModes(madeUpSpec('free-phase', { fields: 1, background: [1] }), snapshot);
    expect(modes.at(judgedFrom)).toMatchObject({ by: 'scan', names: ['mu1'] });
    expect(modes.at(4 * judgedFrom)).toBe(modes.at(judgedFrom));
  });

  it('takes an eighth of the kept draws at most', () => {
    const replicas = 4;
    const [few, many] = [10_000, 50_000].map(
      (kept) => 16 * independentDraws({ ...snapshot, replicas }, kept),
    );
    expect(many - few).toBeGreaterThan(0);
    expect((many - few) / (replicas * 40_000)).toBeLessThan(1 / 8);
  });
});
