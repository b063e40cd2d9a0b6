import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { setTimeout as sleep } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { POST as start } from '@/app/api/v1/notebooks/[id]/fits/route';
import { GET as readFit } from '@/app/api/v1/fits/[id]/route';
import { POST as stop } from '@/app/api/v1/fits/[id]/stop/route';
import { POST as resume } from '@/app/api/v1/fits/[id]/resume/route';
import { POST as extend } from '@/app/api/v1/fits/[id]/extend/route';
import { GET as samples } from '@/app/api/v1/fits/[id]/samples/route';
import {
  createdSchema,
  endedStatuses,
  fitSchema,
  measurementCreatedSchema,
  notebookCreatedSchema,
  type Fit,
} from '@/lib/schemas';
import { call, createGroup, createMember } from './harness';
import { filePart, uploadTo } from './uploads';

const root = fileURLToPath(new URL('../../', import.meta.url));

async function ended(child: ChildProcess): Promise<void> {
  if (child.exitCode === null && child.signalCode === null) await once(child, 'exit');
}

/** Bundles the worker as `npm start` does. */
export async function buildWorker(): Promise<void> {
  const child = spawn(process.execPath, ['scripts/build-worker.mjs'], { cwd: root, stdio: 'inherit' });
  await ended(child);
  if (child.exitCode !== 0) throw new Error('The worker could not be bundled.');
}

export interface RunningWorker {
  /** Asks it to stop, and waits. */
  stop(): Promise<number | null>;
  /** kill -9. */
  kill(): Promise<void>;
}

const running = new Set<ChildProcess>();

/** A worker process with leases that are short enough for a test to see them run out. */
export function startWorker(environment: Record<string, string> = {}): RunningWorker {
  const child = spawn(process.execPath, ['--enable-source-maps', 'dist/worker/main.mjs'], {
    cwd: root,
    stdio: ['ignore', 'inherit', 'inherit'],
    env: {
      ...process.env,
      BEATNOTE_LEASE_MS: '1200',
      BEATNOTE_RECONCILE_MS: '300',
      BEATNOTE_THREADS: '2',
      ...environment,
    },
  });
  running.add(child);
  const end = async (signal: NodeJS.Signals) => {
    child.kill(signal);
    await ended(child);
    running.delete(child);
  };
  return {
    async stop() {
      await end('SIGTERM');
      return child.exitCode;
    },
    kill: () => end('SIGKILL'),
  };
}

/** For `afterAll`: no worker outlives a test file. */
export async function endWorkers(): Promise<void> {
  for (const child of running) child.kill('SIGKILL');
  await Promise.all([...running].map(ended));
  running.clear();
}

export interface Desk {
  group: string;
  token: string;
}

export async function openDesk(): Promise<Desk> {
  const group = await createGroup();
  return { group, token: (await createMember(group, 'analyst')).token };
}

async function parsed<T>(answer: Response, status: number, schema: { parse(value: unknown): T }): Promise<T> {
  if (answer.status !== status) throw new Error(`${answer.status}: ${await answer.text()}`);
  return schema.parse(await answer.json());
}

/** A model that samples quickly: two background terms and no field. */
export const background = { id: 'background', options: { background: [1, 2] } };
export const oneField = { id: 'free-phase', options: { fields: 1 } };
export const twoFields = { id: 'locked-squeezed', options: { fields: 2 } };

/** A new notebook with these settings on a new measurement. */
export async function openNotebook(
  { group, token }: Desk,
  settings: Record<string, unknown>,
  file: 'one-field.csv' | 'two-field.csv' = 'one-field.csv',
  meta: Record<string, unknown> = {},
): Promise<string> {
  const parts = { file: filePart(file), mocks: filePart(file.replace('.csv', '-mocks.csv')) };
  const uploaded = await uploadTo(group, token, { ...parts, meta: JSON.stringify(meta) });
  const { id: measurement } = await parsed(uploaded, 201, measurementCreatedSchema);
  const json = { title: 'Sampling', measurement, ...settings };
  const answer = await call(createNotebook, { params: { id: group }, token, json });
  return (await parsed(answer, 201, notebookCreatedSchema)).id;
}

export async function startFit(
  { token }: Desk,
  notebook: string,
  json: Record<string, unknown>,
): Promise<string> {
  return (await parsed(await call(start, { params: { id: notebook }, token, json }), 202, createdSchema)).id;
}

export const fitOf = async ({ token }: Desk, id: string): Promise<Fit> =>
  parsed(await call(readFit, { params: { id }, token }), 200, fitSchema);

export const stopFit = async ({ token }: Desk, id: string): Promise<Fit> =>
  parsed(await call(stop, { method: 'POST', params: { id }, token }), 200, fitSchema);

export const resumeFit = async ({ token }: Desk, id: string): Promise<Fit> =>
  parsed(await call(resume, { method: 'POST', params: { id }, token }), 200, fitSchema);

export const extendFit = async ({ token }: Desk, id: string, draws: number): Promise<Fit> =>
  parsed(await call(extend, { params: { id }, token, json: { draws } }), 200, fitSchema);

export async function samplesOf({ token }: Desk, id: string): Promise<string> {
  const answer = await call(samples, { params: { id }, token, path: `/fits/${id}/samples?format=csv` });
  if (answer.status !== 200) throw new Error(await answer.text());
  return answer.text();
}

/** Reads the fit until it is as wanted; gives up, with what it was last, before the test does. */
export async function fitWhen(desk: Desk, id: string, wanted: (fit: Fit) => boolean): Promise<Fit> {
  const until = Date.now() + 120_000;
  for (;;) {
    const fit = await fitOf(desk, id);
    if (wanted(fit)) return fit;
    if (Date.now() > until) {
      throw new Error(`The fit is ${fit.status} at ${JSON.stringify(fit.progress)}: ${fit.message ?? ''}`);
    }
    await sleep(60);
  }
}

export const fitEnded = (desk: Desk, id: string): Promise<Fit> =>
  fitWhen(desk, id, ({ status }) => endedStatuses.includes(status));

/** Recorded draws a replica, warm-up included. */
export const drawsOf = ({ progress }: Fit): number => progress.warmup + progress.draws;
