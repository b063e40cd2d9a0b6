import { spawn } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { once } from 'node:events';
import { setTimeout as sleep } from 'node:timers/promises';
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import type { Sequelize } from 'sequelize';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openDatabase } from '@/models';
import { measurements, notebooks } from '@/scripts/demo/scenario';
import { choosePorts } from '../../scripts/supervisor/ports.mjs';
import { startMariadb } from '../../scripts/supervisor/services.mjs';

// A server of its own: the demo is filled into an empty database alone.
let server: Awaited<ReturnType<typeof startMariadb>>;
let sequelize: Sequelize;
const root = process.cwd();
const state = mkdtempSync(path.join(tmpdir(), 'beatnote-demo-'));

beforeAll(async () => {
  for (const part of ['log', 'pid']) mkdirSync(path.join(state, part), { mode: 0o700 });
  const { database: port } = (await choosePorts(state, ['database'])) as { database: number };
  server = await startMariadb({ state, port, password: randomBytes(12).toString('hex') });
  sequelize = openDatabase(server.url);
  expect(await run('migrate')).toBe(0);
});
afterAll(async () => {
  await sequelize.close();
  await server.server.stop();
  rmSync(state, { recursive: true, force: true });
});

/** Runs a script on that database; killed with -9 once `until` comes true. Gives its exit code, null where it was killed. */
async function run(script: string, until?: () => Promise<boolean>): Promise<number | null> {
  const child = spawn(process.execPath, ['--import', 'tsx', `scripts/${script}.ts`], {
    cwd: root,
    env: { ...process.env, DATABASE_URL: server.url },
    stdio: 'ignore',
  });
  const ended = once(child, 'exit');
  while (until && child.exitCode === null) {
    if (await until()) {
      child.kill('SIGKILL');
      break;
    }
    await sleep(5);
  }
  const [code] = (await ended) as [number | null];
  return code;
}

const count = async (table: string): Promise<number> => {
  const [[row]] = (await sequelize.query(`SELECT COUNT(*) AS n FROM ${table}`)) as unknown as [
    { n: number | bigint }[],
  ];
  return Number(row.n);
};
const tables = [
  'users',
  'groups',
  'memberships',
  'measurements',
  'measurement_versions',
  'notebooks',
  'fits',
];
const counts = async () =>
  Object.fromEntries(await Promise.all(tables.map(async (t) => [t, await count(`\`${t}\``)])));
const words = () => count('notebook_revisions WHERE statement IS NOT NULL');

const whole = {
  users: 5,
  groups: 1,
  memberships: 4,
  measurements: measurements.length,
  measurement_versions: measurements.length,
  notebooks: notebooks.length,
  fits: notebooks.filter(({ seed }) => seed !== null).length,
};

describe('the demo', () => {
  it('that is killed between any two of its steps is whole after the next start', async () => {
    const points: [string, () => Promise<boolean>][] = [
      ['after two accounts', async () => (await count('users')) >= 2],
      ['after the group', async () => (await count('`groups`')) >= 1],
      ['after the first measurement', async () => (await count('measurements')) >= 1],
      ['after the first notebook', async () => (await count('notebooks')) >= 1],
      ['after the second fit', async () => (await count('fits')) >= 2],
      ['after the first statement', async () => (await words()) >= 1],
    ];
    for (const [, until] of points) await run('seed-demo', until);
    expect(await run('seed-demo')).toBe(0);
    expect(await counts()).toEqual(whole);
    expect(await words()).toBe(notebooks.filter(({ statement }) => statement !== null).length);
  });

  it('is left alone once it is whole: a second start changes nothing, and what people take away stays away', async () => {
    await sequelize.query("DELETE FROM notebooks WHERE title LIKE 'Would one field do%'");
    const before = await counts();
    expect(await run('seed-demo')).toBe(0);
    expect(await counts()).toEqual(before);
    expect(before.notebooks).toBe(whole.notebooks - 1);
  });

  it('says of every measurement that it is simulated, and of its words what they refer to', async () => {
    const [rows] = await sequelize.query('SELECT name, simulated FROM measurements');
    expect(rows).toHaveLength(measurements.length);
    for (const row of rows as { simulated: number }[]) expect(Boolean(row.simulated)).toBe(true);
  });
});
