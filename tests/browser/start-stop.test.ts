import { afterAll, describe, expect, inject, it } from 'vitest';
import { StartedInstance, processesNaming } from './instance';

const main = inject('instance');
const health = async (url: string) =>
  (await fetch(`${url}/api/v1/health`)).json() as Promise<{ status: string }>;

describe('npm start', () => {
  let second: StartedInstance | null = null;
  afterAll(async () => {
    await second?.stop();
    second?.removeState();
  });

  it('serves with every service well and a worker alive, and prints a sign-in link for each demo account', async () => {
    expect(await health(main.url)).toMatchObject({
      status: 'ok',
      database: 'ok',
      queue: 'ok',
      storage: 'ok',
      workers: 1,
    });
    expect(Object.keys(main.links).sort()).toEqual(
      ['admin', 'analyst', 'lead', 'reader', 'referee'].map((role) => `${role}@demo.beatnote.example`),
    );
  });

  it('refuses a second start from the same state folder and leaves the first one alone', async () => {
    await expect(StartedInstance.start(main.state)).rejects.toThrow(/runs from .* already/);
    expect((await health(main.url)).status).toBe('ok');
  });

  it('runs a second instance side by side, and TERM to npm leaves no process of it', async () => {
    second = await StartedInstance.start();
    expect((await health(second.facts.url)).status).toBe('ok');
    expect(processesNaming(second.facts.state).length).toBeGreaterThan(5);
    await second.stop();
    await expect.poll(() => processesNaming(second!.facts.state), { timeout: 15_000 }).toEqual([]);
    expect((await health(main.url)).status).toBe('ok');
  });

  it('takes up where it stopped at the second start', async () => {
    const state = second!.facts.state;
    second = await StartedInstance.start(state);
    expect((await health(second.facts.url)).status).toBe('ok');
    expect(second.printed()).not.toContain('Building');
    await second.stop();
    await expect.poll(() => processesNaming(state), { timeout: 15_000 }).toEqual([]);
  });
});
