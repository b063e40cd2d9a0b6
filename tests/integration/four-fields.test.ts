import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { database } from '@/lib/db';
import {
  buildWorker,
  drawsOf,
  endWorkers,
  fitEnded,
  fitWhen,
  openDesk,
  openNotebook,
  resumeFit,
  startFit,
  startWorker,
  stopFit,
} from './sampling';
import { closeConnections } from './harness';

beforeAll(async () => {
  database();
  await buildWorker();
  startWorker({ BEATNOTE_THREADS: '4' });
});
afterAll(async () => {
  await endWorkers();
  await closeConnections();
});

/** As few draws as the gate judges at all, for this many parameters: what has to be seen is that the fit says so itself. */
const short = { seed: 4, replicas: 2, maxDraws: 1000 };

describe('a fit of four fields', () => {
  it.each([
    {
      what: 'free amplitudes and phases',
      template: { id: 'free-phase', options: { fields: 4, background: [1, 2, 3] } },
      sampled: ['mu1', 'a1', 'b1', 'mu4', 'a4', 'b4', 'c1'],
    },
    {
      what: 'mixing weights and locked phases',
      template: { id: 'locked-squeezed', options: { fields: 4, background: [1, 2, 3] } },
      sampled: ['mu1', 'mu4', 'angle1', 'angle2', 'angle3', 'g', 'c1'],
    },
  ])(
    'with $what runs through the worker and says why it hasn’t converged',
    async ({ template, sampled }) => {
      const desk = await openDesk();
      const id = await startFit(desk, await openNotebook(desk, { template }, 'two-field.csv'), short);
      const fit = await fitEnded(desk, id);
      expect(fit.status).toBe('budget-spent');
      expect(fit.progress.draws).toBe(short.maxDraws);
      const names = fit.diagnostics.map(({ parameter }) => parameter);
      expect(names).toEqual(expect.arrayContaining(sampled));
      // What is reported is what the draws give: masses in order, and reasons that name a quantity and its number.
      const medians = [1, 2, 3, 4].map(
        (n) => fit.diagnostics.find(({ parameter }) => parameter === `mu${n}`)?.q50,
      );
      expect([...medians].sort((a, b) => Number(a) - Number(b))).toEqual(medians);
      expect(fit.gate.met).toBe(false);
      expect(fit.gate.reasons.length).toBeGreaterThan(0);
      for (const reason of fit.gate.reasons) expect(reason).toMatch(/\d/);
      expect(fit.gate.reasons.join(' ')).toMatch(/R-hat|effective/i);
      expect(fit.modesOf).toEqual({ by: 'run', names: ['mu1', 'mu2', 'mu3', 'mu4'] });
      expect(fit.modes.reduce((sum, { weight }) => sum + Number(weight), 0)).toBeGreaterThan(0.8);
    },
    120_000,
  );
});

describe('the independent run of a fit of three fields', () => {
  it('says the same where the fit was stopped and resumed', async () => {
    const desk = await openDesk();
    const template = { id: 'free-phase', options: { fields: 3, background: [1] } };
    const notebook = await openNotebook(desk, { template }, 'two-field.csv');
    const through = await fitEnded(desk, await startFit(desk, notebook, short));
    expect(through.modesOf).toEqual({ by: 'run', names: ['mu1', 'mu2', 'mu3'] });
    expect(through.modes.length).toBeGreaterThan(0);

    const id = await startFit(desk, notebook, short);
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    await stopFit(desk, id);
    await fitEnded(desk, id);
    await resumeFit(desk, id);
    const resumed = await fitEnded(desk, id);
    expect(resumed.progress.draws).toBe(short.maxDraws);
    expect(resumed.modes).toEqual(through.modes);
    expect(resumed.gate).toEqual(through.gate);
  }, 120_000);
});
