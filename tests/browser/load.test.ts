import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { closeDatabase } from '@/lib/db';
import { takeInstanceEnvironment } from '@/scripts/instance-environment';
import { runLoad, type LoadReport } from '@/scripts/load/run-load';

const { url, state } = inject('instance');

let report: LoadReport;
beforeAll(async () => {
  process.env.BEATNOTE_STATE = state;
  takeInstanceEnvironment();
  report = await runLoad({
    origin: url,
    state,
    viewers: 10,
    queued: 3,
    seconds: 24,
    think: 6,
    patience: 90,
    say: () => undefined,
  });
});
afterAll(closeDatabase);

/** The load of docs/performance.md at a size that a gate can bear. */
describe('ten viewers of one running fit, and three queued fits', () => {
  it('are all answered', () => {
    for (const [name, { count, failed }] of Object.entries(report.answers)) {
      expect([name, failed]).toEqual([name, 0]);
      expect(count, name).toBeGreaterThan(5);
    }
  });

  it('hear of a commit within two seconds, and never of fewer draws than before', () => {
    expect(report.answers.lag.p95).toBeLessThan(2_000);
    expect(report.events.backwards).toBe(0);
  });

  it('lose no draw', () => {
    expect(report.draws.committed).toBeGreaterThan(10_000);
    expect(report.draws.lost).toBe(0);
  });
});
