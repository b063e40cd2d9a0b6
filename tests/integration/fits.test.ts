import { createHash } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { FitBlock, FitReplica } from '@/models';
import { unpackDraws } from '@/components/fit/draws';
import { GET as readDraws } from '@/app/api/v1/fits/[id]/draws/route';
import { GET as readManifest } from '@/app/api/v1/fits/[id]/manifest/route';
import { GET as readSamples } from '@/app/api/v1/fits/[id]/samples/route';
import { POST as resume } from '@/app/api/v1/fits/[id]/resume/route';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { diagnose, essBulk, essTail, rhat, type Diagnosis } from '@/lib/sampler';
import { drawsSchema, manifestSchema } from '@/lib/schemas';
import { call, closeConnections, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  extendFit,
  fitEnded,
  fitOf,
  fitWhen,
  oneField,
  openDesk,
  openNotebook,
  resumeFit,
  samplesOf,
  startFit,
  startWorker,
  stopFit,
  twoFields,
  type Desk,
} from './sampling';

let desk: Desk;
let simple: string;
beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
  simple = await openNotebook(desk, { template: background });
  startWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeQueue();
  await closeConnections();
});

/** A target that no run reaches, so that the budget ends it. */
const unreachable = { ess: 1e9 };

const linesOf = (csv: string) => csv.trimEnd().split('\n');

/** Kept draws of one column, one array a replica. */
function chainsOf(csv: string, column: string): Float64Array[] {
  const [header, ...lines] = linesOf(csv).map((line) => line.split(','));
  const at = header.indexOf(column);
  const chains: number[][] = [];
  for (const line of lines) if (line[2] === '0') (chains[Number(line[0])] ??= []).push(Number(line[at]));
  return chains.map((chain) => Float64Array.from(chain));
}

const reportedOf = ({ mean, sd, q2_5, q16, q50, q84, q97_5, mcseMean, mcseSd }: Diagnosis) => ({
  ...{ mean, sd, q2_5, q16, q50, q84, q97_5 },
  ...{ mcseMean, mcseSd },
});

describe('a fit of two fields', () => {
  it('ends by itself, with diagnostics of exactly the draws in its sample file', async () => {
    const notebook = await openNotebook(desk, { template: twoFields }, 'two-field.csv');
    const id = await startFit(desk, notebook, { seed: 7, maxDraws: 1500, target: { rhat: 1.05, ess: 200 } });
    const fit = await fitEnded(desk, id);
    expect(['converged', 'budget-spent']).toContain(fit.status);
    expect(fit.gate.met).toBe(fit.status === 'converged');
    expect(fit.gate.reasons.length === 0).toBe(fit.gate.met);
    expect(fit.progress).toMatchObject({ warmup: 1500, warmupTotal: 1500, fraction: 1, secondsLeft: 0 });
    expect(fit.progress.draws).toBeGreaterThanOrEqual(1000);
    expect(fit.acceptance.map(({ move }) => move)).toEqual(expect.arrayContaining(['random walk']));
    expect(fit.drawsPerSecond).toBeGreaterThan(0);
    expect(fit.history.at(-1)?.draws).toBe(fit.progress.draws);

    const csv = await samplesOf(desk, id);
    expect(linesOf(csv)).toHaveLength(1 + 4 * (1500 + fit.progress.draws));
    const names = fit.diagnostics.map(({ parameter }) => parameter);
    expect(linesOf(csv)[0]).toBe(`replica,draw,warmup,log_likelihood,log_prior,${names.join(',')}`);
    for (const found of fit.diagnostics) {
      const chains = chainsOf(csv, found.parameter);
      expect(found).toMatchObject(reportedOf(diagnose(chains)));
      expect([rhat(chains), essBulk(chains), essTail(chains)]).toEqual([
        found.rhat,
        found.essBulk,
        found.essTail,
      ]);
    }
  });
});

describe('stop, resume and extend', () => {
  it('keeps what is there when stopped, and goes on to the bytes of a run in one go', async () => {
    const settings = { seed: 'stopped', maxDraws: 12_000, target: unreachable };
    const id = await startFit(desk, simple, settings);
    await fitWhen(desk, id, ({ progress }) => progress.draws >= 500);
    await stopFit(desk, id);
    const stopped = await fitEnded(desk, id);
    expect(stopped.status).toBe('stopped');
    expect(stopped.progress.draws).toBeLessThan(12_000);
    expect(stopped.history.at(-1)?.draws).toBe(stopped.progress.draws);
    expect(stopped.may).toContain('fit.resume');
    const before = await samplesOf(desk, id);
    expect(chainsOf(before, 'c1')[3]).toHaveLength(stopped.progress.draws);

    expect((await resumeFit(desk, id)).status).toBe('queued');
    expect((await fitEnded(desk, id)).status).toBe('budget-spent');
    const whole = await startFit(desk, simple, settings);
    await fitEnded(desk, whole);
    expect(await samplesOf(desk, id)).toBe(await samplesOf(desk, whole));
  });

  it('extends a spent budget that isn’t a multiple of the block to the bytes of a longer run', async () => {
    const id = await startFit(desk, simple, { seed: 3, maxDraws: 730, target: unreachable });
    expect(await fitEnded(desk, id)).toMatchObject({ status: 'budget-spent', progress: { draws: 730 } });
    const short = linesOf(await samplesOf(desk, id));
    expect((await extendFit(desk, id, 900)).progress.maxDraws).toBe(1630);
    expect(await fitEnded(desk, id)).toMatchObject({ status: 'budget-spent', progress: { draws: 1630 } });
    const longer = await startFit(desk, simple, { seed: 3, maxDraws: 1630, target: unreachable });
    await fitEnded(desk, longer);
    const csv = await samplesOf(desk, longer);
    expect(await samplesOf(desk, id)).toBe(csv);
    expect(new Set(linesOf(csv))).toEqual(new Set([...linesOf(csv), ...short]));
  });

  it('goes on with a converged fit to the end of the extended budget, and then says again that it has converged', async () => {
    const id = await startFit(desk, simple, { seed: 5, target: { rhat: 1.2, ess: 50 } });
    expect(await fitEnded(desk, id)).toMatchObject({ status: 'converged', progress: { draws: 1000 } });
    const refused = await call(resume, { method: 'POST', params: { id }, token: desk.token });
    expect(await errorOf(refused)).toMatchObject({ status: 409, code: 'conflict' });
    await extendFit(desk, id, 1200);
    expect(await fitEnded(desk, id)).toMatchObject({ status: 'converged', progress: { draws: 2200 } });
  });

  it('stops a fit that waits, with nothing drawn', async () => {
    const id = await startFit(desk, simple, { maxDraws: 1_000_000, target: unreachable });
    await stopFit(desk, id);
    const fit = await fitEnded(desk, id);
    expect(fit.status).toBe('stopped');
    const csv = await samplesOf(desk, id);
    expect(linesOf(csv)).toHaveLength(1 + 4 * (fit.progress.warmup + fit.progress.draws));
  });
});

describe('a fit’s seed', () => {
  it('fixes every byte, and another seed gives other draws', async () => {
    const settings = { replicas: 2, maxDraws: 600, target: unreachable };
    const ids = [];
    for (const seed of ['a', 'a', 'b']) ids.push(await startFit(desk, simple, { ...settings, seed }));
    for (const id of ids) await fitEnded(desk, id);
    const [one, same, other] = await Promise.all(ids.map((id) => samplesOf(desk, id)));
    expect(same).toBe(one);
    expect(other).not.toBe(one);
    const [first, second] = await Promise.all(ids.slice(0, 2).map((id) => fitOf(desk, id)));
    expect(second.snapshot).toEqual(first.snapshot);
    expect(second.number).toBe(first.number + 1);
  });

  it('is drawn where none is given, each time another', async () => {
    const ids = [await startFit(desk, simple, {}), await startFit(desk, simple, {})];
    const fits = await Promise.all(ids.map((id) => fitOf(desk, id)));
    expect(fits[0].snapshot.seed).toMatch(/^[0-9a-f]{32}$/);
    expect(fits[1].snapshot.seed).not.toBe(fits[0].snapshot.seed);
    expect(fits[1].snapshot.sha256).not.toBe(fits[0].snapshot.sha256);
    for (const id of ids) await stopFit(desk, id);
  });
});

describe('what a fit gives out', () => {
  let id: string;
  beforeAll(async () => {
    const notebook = await openNotebook(desk, { template: oneField });
    id = await startFit(desk, notebook, { seed: 11, maxDraws: 1100, target: unreachable });
    await fitEnded(desk, id);
  });

  it('is a manifest with the checksum of the very file that is downloaded', async () => {
    const answer = await call(readManifest, { params: { id }, token: desk.token });
    const manifest = manifestSchema.parse(await answer.json());
    const csv = await samplesOf(desk, id);
    expect(manifest.outputs).toContainEqual({
      name: 'samples.csv',
      bytes: Buffer.byteLength(csv),
      sha256: createHash('sha256').update(csv).digest('hex'),
    });
    expect(manifest.inputs.map(({ part }) => part)).toEqual(['file', 'mocks']);
    expect(manifest.versions).toMatchObject({ node: process.version, architecture: process.arch });
    expect(new Set(manifest.seeds.replicas).size).toBe(4);
    expect(manifest.howToRunAgain.join('\n')).toContain('"seed":"11"');
  });

  it('is a manifest whose steps, followed to the letter, give the same bytes', async () => {
    const answer = await call(readManifest, { params: { id }, token: desk.token });
    const { howToRunAgain } = manifestSchema.parse(await answer.json());
    const given = (word: string): Record<string, unknown> => {
      const step = howToRunAgain.find((each) => each.includes(word)) ?? '';
      return JSON.parse(step.slice(step.indexOf('{'), step.lastIndexOf('}') + 1)) as Record<string, unknown>;
    };
    const notebook = await openNotebook(desk, given('/notebooks with'), 'one-field.csv', given('with meta'));
    const again = await startFit(desk, notebook, given('/fits with'));
    expect((await fitEnded(desk, again)).snapshot).toEqual((await fitOf(desk, id)).snapshot);
    expect(await samplesOf(desk, again)).toBe(await samplesOf(desk, id));
  });

  it('is a sample file in which neither an id nor a date stands', async () => {
    const csv = await samplesOf(desk, id);
    expect(csv).not.toContain(id);
    expect(csv).not.toMatch(/\d{4}-\d\d-\d\d/);
    const [header, first] = linesOf(csv);
    expect(header.split(',').slice(0, 8)).toEqual([
      ...['replica', 'draw', 'warmup', 'log_likelihood', 'log_prior'],
      ...['mu1', 'a1', 'b1'],
    ]);
    expect(first.startsWith('0,0,1,')).toBe(true);
    expect(linesOf(csv).at(-1)?.startsWith('3,2599,0,')).toBe(true);
  });

  it('is refused in a format that there isn’t, with those that there are', async () => {
    const path = `/fits/${id}/samples?format=xlsx`;
    const error = await errorOf(await call(readSamples, { params: { id }, token: desk.token, path }));
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    expect(error.message).toContain('csv');
  });

  it('is draws for figures, thinned evenly and marked where they are of warm-up', async () => {
    const path = `/fits/${id}/draws?max=1000`;
    const answer = await call(readDraws, { params: { id }, token: desk.token, path });
    const draws = drawsSchema.parse(await answer.json());
    expect(draws.draw.length).toBeLessThanOrEqual(1000);
    expect(draws.draw.length).toBeGreaterThan(800);
    expect(Object.keys(draws.columns)).toEqual(expect.arrayContaining(['mu1', 'm1_over_H']));
    draws.draw.forEach((draw, i) => {
      expect(draws.warmup[i]).toBe(draw < 1500 ? 1 : 0);
      expect((draw < 1500 ? draw : draw - 1500) % draws.stride).toBe(0);
    });
  });

  it('gives the same draws packed, in the precision of a figure', async () => {
    const path = `/fits/${id}/draws?max=1000`;
    const ask = (of: string) => call(readDraws, { params: { id }, token: desk.token, path: of });
    const plain = drawsSchema.parse(await (await ask(path)).json());
    const answer = await ask(`${path}&format=float32`);
    expect(answer.headers.get('content-type')).toBe('application/octet-stream');
    const packed = unpackDraws(await answer.arrayBuffer());
    expect(packed.stride).toBe(plain.stride);
    for (const key of ['replica', 'draw', 'warmup'] as const)
      expect(Array.from(packed[key])).toEqual(plain[key]);
    expect(Object.keys(packed.columns)).toEqual(Object.keys(plain.columns));
    // A float32 has 24 bits: 6e-8 of the value; the plain form is rounded to seven digits.
    Array.from(packed.columns.mu1).forEach((value, i) =>
      expect(Math.abs(value / plain.columns.mu1[i] - 1)).toBeLessThan(6e-7),
    );
  });

  it('is kept as blocks with one whole state a replica', async () => {
    const blocks = await FitBlock.findAll({
      where: { fitId: id },
      attributes: ['replica', 'firstDraw', 'rows'],
    });
    const rows = blocks.reduce((sum, block) => sum + block.rows, 0);
    expect(rows).toBe(4 * 2600);
    expect(await FitReplica.count({ where: { fitId: id, draws: 2600 } })).toBe(4);
  });
});
