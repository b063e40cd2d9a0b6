import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { randomBytes } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { config } from '@/lib/config';
import { openStorage, storage } from '@/storage';
import { sha256Of } from '@/storage/client';
import { closeConnections, unique } from './harness';

beforeAll(() => storage().ensureBucket());
afterAll(closeConnections);

describe('the object store', () => {
  it('gives back the very bytes, with their length and SHA-256', async () => {
    const key = unique('objects/some');
    const bytes = randomBytes(300_000);
    expect(await storage().putVerified(key, bytes)).toEqual({
      sha256: await sha256Of(bytes),
      bytes: 300_000,
    });
    expect((await storage().get(key))?.equals(bytes)).toBe(true);
  });

  it('takes an empty object and text that is not ASCII', async () => {
    const key = unique('objects/empty');
    expect((await storage().putVerified(key, new Uint8Array(0))).bytes).toBe(0);
    const text = Buffer.from('κ, S, σ\r\n', 'utf8');
    await storage().putVerified(key, text);
    expect((await storage().get(key))?.toString('utf8')).toBe('κ, S, σ\r\n');
  });

  it('knows nothing of what was deleted or never there', async () => {
    const key = unique('objects/gone');
    await storage().putVerified(key, Buffer.from('x'));
    await storage().delete(key);
    expect(await storage().get(key)).toBeNull();
    await expect(storage().delete(key)).resolves.toBeUndefined();
  });

  it('makes its bucket once and finds it afterwards', async () => {
    const other = openStorage({ ...config().storage, bucket: unique('bucket') });
    await expect(other.ping()).rejects.toThrow();
    await other.ensureBucket();
    await other.ensureBucket();
    await expect(other.ping()).resolves.toBeUndefined();
    other.close();
  });

  it('refuses a store that keeps other bytes than it was given, and removes them', async () => {
    const calls: string[] = [];
    const server = createServer((request, response) => {
      calls.push(request.method ?? '');
      request.resume();
      request.on('end', () => {
        response.writeHead(request.method === 'DELETE' ? 204 : 200);
        response.end(request.method === 'GET' ? '3;chunk-signature=0\r\nabc' : undefined);
      });
    });
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
    const { port } = server.address() as AddressInfo;
    const corrupting = openStorage({ ...config().storage, endpoint: `http://127.0.0.1:${port}` });
    await expect(corrupting.putVerified('a', Buffer.from('abc'))).rejects.toThrow(/other bytes/);
    expect(calls).toEqual(['PUT', 'GET', 'DELETE']);
    corrupting.close();
    await new Promise((resolve) => server.close(resolve));
  });
});
