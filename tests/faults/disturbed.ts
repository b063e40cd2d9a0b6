import { expect } from 'vitest';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { closeConnections } from '../integration/harness';
import {
  buildWorker,
  endWorkers,
  fitEnded,
  openDesk,
  openNotebook,
  samplesOf,
  startFit,
  startWorker,
  type Desk,
} from '../integration/sampling';

/** A fit that ran undisturbed, and others of the very same settings that are to come to the same whatever befalls them. */
export class Disturbed {
  private constructor(
    readonly desk: Desk,
    readonly notebook: string,
    readonly settings: Record<string, unknown>,
    private readonly undisturbed: Outcome,
    /** Seconds that the undisturbed fit was sampled. */
    readonly seconds: number,
  ) {}

  static async run(template: object, settings: Record<string, unknown>): Promise<Disturbed> {
    database();
    await buildWorker();
    const desk = await openDesk();
    const notebook = await openNotebook(desk, { template });
    const worker = startWorker();
    const id = await startFit(desk, notebook, settings);
    const { progress } = await fitEnded(desk, id);
    const outcome = await outcomeOf(desk, id);
    await worker.stop();
    return new Disturbed(desk, notebook, settings, outcome, progress.secondsSpent);
  }

  start(): Promise<string> {
    return startFit(this.desk, this.notebook, this.settings);
  }

  /** Waits for its end: the bytes, diagnostics, gate and history of the undisturbed one. */
  async expectUndisturbed(id: string): Promise<void> {
    const fit = await fitEnded(this.desk, id);
    expect(fit.status).toBe('budget-spent');
    expect(await outcomeOf(this.desk, id)).toEqual(this.undisturbed);
  }

  static async close(): Promise<void> {
    await endWorkers();
    await closeQueue();
    await closeConnections();
  }
}

interface Outcome {
  csv: string;
  diagnostics: unknown;
  gate: unknown;
  history: unknown;
}

async function outcomeOf(desk: Desk, id: string): Promise<Outcome> {
  const { diagnostics, gate, history } = await fitEnded(desk, id);
  return { csv: await samplesOf(desk, id), diagnostics, gate, history };
}
