import { execFile } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { promisify } from 'node:util';
import { afterAll, describe, expect, inject, it } from 'vitest';

const run = promisify(execFile);
const root = path.resolve(import.meta.dirname, '../..');
const data = path.join(root, 'tests/data/measurements');
const { url, state } = inject('instance');
const folder = mkdtempSync(path.join(tmpdir(), 'beatnote-script-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function token(email: string): Promise<string> {
  const environment = { ...process.env, BEATNOTE_STATE: state };
  const { stdout } = await run('npm', ['run', 'token', '--', '--email', email], {
    cwd: root,
    env: environment,
  });
  return stdout;
}

describe('the main job from a script', () => {
  it('prints one token and nothing else', async () => {
    expect(await token('analyst@demo.beatnote.example')).toMatch(/^bn_[\w-]{43}\n$/);
  });

  it('says which user it does not know', async () => {
    await expect(token('nobody@demo.beatnote.example')).rejects.toThrow(/nobody@demo\.beatnote\.example/);
  });

  it('goes from a token to samples with curl and jq, and finds the mass that was put in within 3 sd', async () => {
    const environment = {
      ...process.env,
      BEATNOTE_URL: url,
      TOKEN: (await token('analyst@demo.beatnote.example')).trim(),
    };
    const files = ['one-field.csv', 'one-field-mocks.csv'].map((name) => path.join(data, name));
    const { stdout } = await run('bash', ['docs/main-job.sh', ...files, folder], {
      cwd: root,
      env: environment,
      timeout: 170_000,
    });
    expect(stdout).toContain('36 bins, 0.004 <= kappa <= 0.3');
    expect(stdout).toContain('samples.csv: OK');
    const [head, ...rows] = readFileSync(path.join(folder, 'samples.csv'), 'utf8').trim().split('\n');
    const columns = head.split(',');
    const kept = rows
      .map((row) => row.split(',').map(Number))
      .filter((row) => row[columns.indexOf('warmup')] === 0);
    const masses = kept.map((row) => row[columns.indexOf('mu1')]);
    const mean = masses.reduce((sum, mass) => sum + mass, 0) / masses.length;
    const sd = Math.sqrt(masses.reduce((sum, mass) => sum + (mass - mean) ** 2, 0) / (masses.length - 1));
    // The file's signal has μ = 1.3 (derived by us; see tests/data/measurements/README.md).
    expect(Math.abs(mean - 1.3)).toBeLessThan(3 * sd);
    expect(sd).toBeLessThan(0.5);
  });

  it('prints the program’s own words where a file is wrong, and ends with an error', async () => {
    const environment = {
      ...process.env,
      BEATNOTE_URL: url,
      TOKEN: (await token('analyst@demo.beatnote.example')).trim(),
    };
    const wrong = path.join(data, 'one-field-mocks.csv');
    const points = path.join(data, 'two-field.csv');
    const attempt = run('bash', ['docs/main-job.sh', points, wrong, folder], { cwd: root, env: environment });
    await expect(attempt).rejects.toMatchObject({ code: 1, stderr: expect.stringMatching(/mocks/) });
  });
});
