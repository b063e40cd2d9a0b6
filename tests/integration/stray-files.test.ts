import { randomUUID } from 'node:crypto';
import { utimesSync } from 'node:fs';
import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { MeasurementVersion } from '@/models';
import { database } from '@/lib/db';
import { deleteStrayFiles } from '@/lib/services/stray-files';
import { storage } from '@/storage';
import { closeConnections, createGroup, createMember, unique } from './harness';
import { buildWorker, startWorker } from './sampling';
import { dataFile, objectFiles, uploadData } from './uploads';

beforeAll(async () => {
  database();
  await storage().ensureBucket();
});
afterAll(closeConnections);

let kept: { key: string; bytes: number }[];
beforeEach(async () => {
  const group = await createGroup();
  const { token } = await createMember(group, 'analyst');
  const { id } = await uploadData(group, token, 'two-field.csv');
  kept = (await MeasurementVersion.findOne({ where: { measurementId: id }, rejectOnEmpty: true })).files;
  // What other tests left is none of these tests' business.
  await deleteStrayFiles(minutes(61));
});

/** What an upload leaves that was killed before its rows were there. */
async function leaveFiles(): Promise<string[]> {
  const folder = `measurements/${randomUUID()}/${randomUUID()}`;
  const keys = [`${folder}/file`, `${folder}/mocks`];
  for (const key of keys) await storage().putVerified(key, dataFile('two-field.csv'));
  return keys;
}

const minutes = (count: number): Date => new Date(Date.now() + count * 60_000);
const present = async (keys: string[]): Promise<boolean[]> =>
  Promise.all(keys.map(async (key) => (await storage().get(key)) !== null));

async function listed(prefix: string, pageSize?: number): Promise<string[][]> {
  const pages: string[][] = [];
  for await (const page of storage().list(prefix, pageSize)) pages.push(page.map(({ key }) => key));
  return pages;
}

describe('the list of the object store', () => {
  it('comes in pages, in the order of keys, with the time of each and nothing else', async () => {
    const folder = unique('listed');
    const keys = Array.from({ length: 5 }, (_, i) => `${folder}/${i}`);
    for (const key of keys.toReversed()) await storage().putVerified(key, Buffer.from(key));
    await storage().putVerified(`${folder}-other`, Buffer.from('x'));
    expect(await listed(`${folder}/`, 2)).toEqual([keys.slice(0, 2), keys.slice(2, 4), keys.slice(4)]);
    expect((await listed(`${folder}/`)).flat()).toEqual(keys);
    expect((await listed(unique('nothing'))).flat()).toEqual([]);
    for await (const page of storage().list(`${folder}/`)) {
      for (const { storedAt } of page) expect(Math.abs(Date.now() - storedAt.getTime())).toBeLessThan(60_000);
    }
  });
});

describe('files that no measurement names', () => {
  it('are deleted when they are an hour old, page by page, and those of measurements stay', async () => {
    const stray = [...(await leaveFiles()), ...(await leaveFiles()), ...(await leaveFiles())];
    await deleteStrayFiles(minutes(59), 2);
    expect(await present(stray)).toEqual(stray.map(() => true));
    expect(await deleteStrayFiles(minutes(61), 2)).toBe(stray.length);
    expect(await present(stray)).toEqual(stray.map(() => false));
    for (const { key, bytes } of kept) expect((await storage().get(key))?.byteLength).toBe(bytes);
    expect(await deleteStrayFiles(minutes(61), 2)).toBe(0);
  });

  it('are deleted also beside files of the same version that are named', async () => {
    const beside = kept[0].key.replace(/[a-z]+$/, 'covariance');
    await storage().putVerified(beside, Buffer.from('1'));
    expect(await deleteStrayFiles(minutes(61))).toBe(1);
    expect(await present([beside, kept[0].key])).toEqual([false, true]);
  });

  it('stay where their keys are not of an upload', async () => {
    const foreign = [unique('measurements/notes'), unique('others/x')];
    for (const key of foreign) await storage().putVerified(key, Buffer.from('x'));
    await deleteStrayFiles(minutes(61));
    expect(await present(foreign)).toEqual([true, true]);
  });

  it('are deleted by a worker when it starts', async () => {
    await buildWorker();
    const stray = await leaveFiles();
    // The store takes the time of an object from its files.
    const twoHoursAgo = new Date(Date.now() - 2 * 3_600_000);
    const version = stray[0].split('/')[2];
    for (const file of objectFiles().filter((name) => name.includes(version))) {
      utimesSync(file, twoHoursAgo, twoHoursAgo);
    }
    const worker = startWorker();
    try {
      await expect.poll(() => present(stray), { timeout: 30_000 }).toEqual([false, false]);
      expect(await present([kept[0].key])).toEqual([true]);
    } finally {
      await worker.stop();
    }
  });

  it('stay while the database knows of no measurement at all: it may be the wrong one', async () => {
    const stray = await leaveFiles();
    const none = vi.spyOn(MeasurementVersion, 'findOne').mockResolvedValueOnce(null);
    expect(await deleteStrayFiles(minutes(61))).toBe(0);
    none.mockRestore();
    expect(await present(stray)).toEqual([true, true]);
    expect(await deleteStrayFiles(minutes(61))).toBe(2);
  });
});
