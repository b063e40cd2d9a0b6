import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { describe, expect, it } from 'vitest';
import { Supervised } from '../../scripts/supervisor/processes.mjs';

describe('a supervised process', () => {
  it('ranks below the others of its instance where it is to, as a session and not only as a thread', async () => {
    const state = mkdtempSync(path.join(tmpdir(), 'supervised-'));
    for (const folder of ['log', 'pid']) mkdirSync(path.join(state, folder));
    const plain = {
      state,
      command: process.execPath,
      args: ['-e', 'setTimeout(() => {}, 60_000)'],
      env: process.env,
      cwd: state,
    };
    const servers = [
      new Supervised({ ...plain, name: 'first' }),
      new Supervised({ ...plain, name: 'behind', nice: 10 }),
    ];
    try {
      servers.forEach((server) => server.start());
      const ranks = () =>
        servers.map(({ pid }) => /nice (-?\d+)/.exec(readFileSync(`/proc/${pid}/autogroup`, 'utf8'))?.[1]);
      // A kernel without groups by session has nothing to set.
      if (existsSync('/proc/self/autogroup')) await expect.poll(ranks).toEqual(['0', '10']);
      expect(servers.every(({ pid }) => existsSync(`/proc/${pid}`))).toBe(true);
    } finally {
      for (const server of servers) await server.stop();
      rmSync(state, { recursive: true });
    }
  });
});
