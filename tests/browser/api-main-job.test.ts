import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import path from 'node:path';
import { beforeAll, describe, expect, inject, it } from 'vitest';
import type { Fit, Me } from '@/lib/schemas';

const root = path.resolve(import.meta.dirname, '../..');
const { url, state } = inject('instance');
let token: string;

async function call<T>(method: string, place: string, body?: unknown): Promise<T> {
  const form = body instanceof FormData;
  const response = await fetch(`${url}/api/v1${place}`, {
    method,
    headers: {
      authorization: `Bearer ${token}`,
      ...(body && !form ? { 'content-type': 'application/json' } : {}),
    },
    body: form ? body : body === undefined ? undefined : JSON.stringify(body),
  });
  const answer = (await response.json()) as T;
  if (!response.ok) throw new Error(`${method} ${place}: ${response.status} ${JSON.stringify(answer)}`);
  return answer;
}

async function upload(name: string): Promise<string> {
  const me = await call<Me>('GET', '/me');
  const part = (file: string) =>
    new File([readFileSync(path.join(root, 'tests/data/measurements', file))], file);
  const form = new FormData();
  form.set('file', part(`${name}.csv`));
  form.set('mocks', part(`${name}-mocks.csv`));
  const { id } = await call<{ id: string }>('POST', `/groups/${me.groups[0].id}/measurements`, form);
  return id;
}

/** Runs a fit to its end and gives it back. */
async function fitOf(notebook: Record<string, unknown>, settings: Record<string, unknown>): Promise<Fit> {
  const me = await call<Me>('GET', '/me');
  const { id: notebookId } = await call<{ id: string }>(
    'POST',
    `/groups/${me.groups[0].id}/notebooks`,
    notebook,
  );
  const { id } = await call<{ id: string }>('POST', `/notebooks/${notebookId}/fits`, settings);
  const running = ['queued', 'warming-up', 'sampling'];
  await expect
    .poll(async () => (await call<Fit>('GET', `/fits/${id}`)).status, { timeout: 150_000, interval: 500 })
    .not.toSatisfy((status: string) => running.includes(status));
  return call<Fit>('GET', `/fits/${id}`);
}

beforeAll(() => {
  token = execFileSync('npm', ['run', 'token', '--', '--email', 'analyst@demo.beatnote.example'], {
    cwd: root,
    env: { ...process.env, BEATNOTE_STATE: state },
    encoding: 'utf8',
  }).trim();
});

/** Files with mocks of tests/data/measurements, derived by us: signals and noise are made up, what was put in is known. */
describe('the main job over the API', () => {
  it('finds the mass 1.3 of the one-field measurement within 3 sd', async () => {
    const normal = (sd: number) => ({ kind: 'normal', mean: 0, sd });
    const fit = await fitOf(
      {
        title: 'One field',
        measurement: await upload('one-field'),
        cuts: { kappaMax: 0.2 },
        template: {
          id: 'free-phase',
          options: { fields: 1, amplitudes: 'quadrature', background: [1, 2, 3] },
        },
        priors: {
          mu1: { kind: 'uniform', lo: 0.2, hi: 8 },
          ...{ a1: normal(1), b1: normal(1) },
          ...{ c1: normal(3), c2: normal(3), c3: normal(3) },
        },
      },
      { seed: 11, target: { ess: 1000 } },
    );
    expect(fit.status).toBe('converged');
    const mu = fit.diagnostics.find(({ parameter }) => parameter === 'mu1')!;
    expect(Math.abs(mu.mean! - 1.3)).toBeLessThan(3 * mu.sd!);
    expect(mu.sd).toBeLessThan(0.1);
  });

  /**
   * Masses and angle of the same model by a quadrature that is written apart from the engine: tests/published/locked-quadrature.ts at
   * order 16, step 0.004, where its own error is below 0.001.
   */
  const quadrature = {
    mu1: { mean: 0.9513, sd: 0.1524 },
    mu2: { mean: 2.3135, sd: 0.8326 },
    theta: { mean: 0.9491, sd: 0.1786 },
  };

  it('gives masses and mixing angle of two locked fields as an independent quadrature does', async () => {
    const measurement = await upload('two-field');
    const normal = (sd: number) => ({ kind: 'normal', mean: 0, sd });
    const uniform = { kind: 'uniform', lo: 0.2, hi: 8 };
    const fit = await fitOf(
      {
        title: 'Two locked fields',
        measurement,
        cuts: { kappaMax: 0.2 },
        likelihood: { kind: 'matched-t' },
        template: {
          id: 'locked-squeezed',
          options: { fields: 2, vertex: 2, phases: 'locked', background: [1, 2, 3] },
        },
        priors: {
          ...{ mu1: uniform, mu2: uniform, theta: { kind: 'isotropic' } },
          ...{ g: normal(30), c1: normal(3), c2: normal(3), c3: normal(3) },
        },
      },
      { seed: 12, maxDraws: 50_000, target: { ess: 4000 } },
    );
    expect(fit.status).toBe('converged');
    for (const [name, exact] of Object.entries(quadrature)) {
      const found = fit.diagnostics.find(({ parameter }) => parameter === name)!;
      expect(Math.abs(found.mean! - exact.mean), `${name} in sd`).toBeLessThan(3 * found.sd!);
      const error = Math.hypot(found.mcseMean!, 0.001);
      expect(Math.abs(found.mean! - exact.mean) / error, `${name} in Monte Carlo errors`).toBeLessThan(4);
    }
  });
});
