import { randomBytes } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
import { isMainThread } from 'node:worker_threads';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { MeasurementVersion } from '@/models';
import { GET as health } from '@/app/api/v1/health/route';
import { database } from '@/lib/db';
import { AppError } from '@/lib/errors';
import { preflight } from '@/lib/measurements';
import { healthSchema, measurementCreatedSchema } from '@/lib/schemas';
import { checkFiles, type FilesToCheck } from '@/lib/services/measurement-preflight';
import { storage } from '@/storage';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { buildWorker } from './sampling';
import { kept, uploadTo } from './uploads';

beforeAll(async () => {
  database();
  await buildWorker();
});
afterAll(closeConnections);

const bins = 40;

/** A measurement of `bins` points with edges. */
function points(): string {
  const edge = (i: number) => 0.003 * 100 ** (i / bins);
  const rows = Array.from({ length: bins }, (_, i) => `${edge(i)},${edge(i + 1)},${Math.sin(i) / 100},0.3`);
  return `kappa_lo,kappa_hi,S,sigma\n${rows.join('\n')}\n`;
}

/** As many mocks of those points, each value uniform between −½ and ½. */
function mocks(count: number): string {
  const random = randomBytes(4 * count * bins);
  const value = (k: number) => (random.readUInt32LE(4 * k) / 2 ** 32 - 0.5).toFixed(6);
  return Array.from({ length: count }, (_, row) =>
    Array.from({ length: bins }, (_, j) => value(row * bins + j)).join(','),
  ).join('\n');
}

const filesOf = (mocksText: string, file = points()): FilesToCheck => ({
  file: { bytes: Buffer.from(file), name: 'points.csv' },
  mocks: { bytes: Buffer.from(mocksText), name: 'mocks.csv' },
});

/**
 * Processor time of this very thread so far, in ms: what others have to wait for, however busy the machine is.
 *
 * @see proc(5), /proc/[pid]/task/[tid]/schedstat: its first number is the time spent on the processor, in ns
 */
function ownMilliseconds(): number {
  expect(isMainThread).toBe(true);
  const [spent] = readFileSync(`/proc/self/task/${process.pid}/schedstat`, 'utf8').split(' ');
  return Number(spent) / 1e6;
}

/** What this thread spends from one answer of GET /health to the next, again and again until `work` has ended. */
async function healthDuring(work: Promise<unknown>): Promise<number[]> {
  const times: number[] = [];
  let over = false;
  void work.catch(() => undefined).finally(() => (over = true));
  while (!over) {
    const before = ownMilliseconds();
    healthSchema.parse(await (await call(health)).json());
    await sleep(20);
    times.push(ownMilliseconds() - before);
  }
  return times;
}

async function thrown(work: Promise<unknown>): Promise<AppError> {
  const error = await work.then(
    () => null,
    (reason: unknown) => reason,
  );
  if (error instanceof AppError) return error;
  throw new Error('It did not fail as it should have.', { cause: error });
}

describe('a large upload', () => {
  it('is checked without keeping others waiting, and with the result that it has in line', async () => {
    const text = mocks(90_000);
    const files = filesOf(text);
    const bytes = files.mocks!.bytes.byteLength;
    expect(bytes).toBeGreaterThan(30e6);
    await call(health);
    const work = checkFiles(files);
    // The memory went along instead of being copied.
    expect(files.mocks!.bytes.byteLength).toBe(0);
    const times = await healthDuring(work);
    const checked = await work;
    expect(times.length).toBeGreaterThan(3);
    expect(Math.max(...times)).toBeLessThan(200);
    // The same in line holds this thread up, so that the bound can fail.
    const before = ownMilliseconds();
    expect(checked.result).toEqual(preflight(filesOf(text)));
    expect(ownMilliseconds() - before).toBeGreaterThan(200);
    expect(Buffer.from(checked.files.mocks!.bytes).equals(Buffer.from(text))).toBe(true);
  });

  it('is stored byte for byte, although its bytes went to the thread and back', async () => {
    const group = await createGroup();
    const { token } = await createMember(group, 'analyst');
    const text = mocks(5_000);
    const answer = await uploadTo(group, token, {
      file: { name: 'points.csv', bytes: points() },
      mocks: { name: 'mocks.csv', bytes: text },
    });
    expect(answer.status).toBe(201);
    const created = measurementCreatedSchema.parse(await answer.json());
    expect(created.checks.map(({ code }) => code)).toContain('mocks-ok');
    const version = await MeasurementVersion.findOne({
      where: { measurementId: created.id },
      rejectOnEmpty: true,
    });
    const stored = await Promise.all(version.files.map(({ key }) => storage().get(key)));
    expect(stored.map((bytes) => bytes?.toString())).toEqual([points(), text]);
  });

  it('with faults names them by line as a small one does, and stores nothing', async () => {
    const group = await createGroup();
    const { token } = await createMember(group, 'analyst');
    const before = await kept();
    const bad = mocks(5_000).split('\n').with(4_321, 'a').join('\n');
    const answer = await uploadTo(group, token, {
      file: { name: 'points.csv', bytes: points() },
      mocks: { name: 'mocks.csv', bytes: bad },
    });
    const error = await errorOf(answer);
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    expect(error.details).toContainEqual(expect.objectContaining({ path: 'mocks', line: 4_322 }));
    expect(await kept()).toEqual(before);
  });

  it('that takes too long is stopped and may be tried again', async () => {
    const error = await thrown(checkFiles(filesOf(mocks(20_000)), { milliseconds: 20, heapMegabytes: 512 }));
    expect([error.code, error.status]).toEqual(['unavailable', 503]);
    expect(error.message).toContain('Nothing was stored');
  });

  it('that needs more memory than there is for it is refused by its part', async () => {
    // Distinct mocks, of which every one is remembered to be compared with those that follow.
    const rows = Array.from({ length: 600_000 }, (_, i) => `${i},1`).join('\n');
    const file = 'kappa,S,sigma\n0.1,1,1\n0.2,1,1\n';
    const error = await thrown(checkFiles(filesOf(rows, file), { milliseconds: 60_000, heapMegabytes: 16 }));
    expect([error.code, error.status]).toEqual(['invalid', 422]);
    expect(error.details).toMatchObject([{ path: 'mocks' }]);
  });

  it('waits for its turn behind two others, and beyond eight that wait is told to come back', async () => {
    const text = mocks(4_000);
    const all = await Promise.allSettled(Array.from({ length: 12 }, () => checkFiles(filesOf(text))));
    const refused = all.flatMap((one) => (one.status === 'rejected' ? [one.reason as AppError] : []));
    expect(refused.map(({ code }) => code)).toEqual(['unavailable', 'unavailable']);
    expect(all.filter((one) => one.status === 'fulfilled' && one.value.result.ok)).toHaveLength(10);
  });
});
