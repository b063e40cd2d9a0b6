import { createHash } from 'node:crypto';
import { monitorEventLoopDelay } from 'node:perf_hooks';
import { parquetMetadata } from 'hyparquet';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Fit, FitBlock } from '@/models';
import { GET as readManifest } from '@/app/api/v1/fits/[id]/manifest/route';
import { GET as readSamples } from '@/app/api/v1/fits/[id]/samples/route';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { manifestSchema, sampleFormats, type SampleFormat } from '@/lib/schemas';
import { writeDoubles } from '@/lib/services/inference-spec';
import { call, closeConnections, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  fitEnded,
  openDesk,
  openNotebook,
  startFit,
  startWorker,
  stopFit,
  type Desk,
} from './sampling';

let desk: Desk;
beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
});
afterAll(async () => {
  await endWorkers();
  await closeQueue();
  await closeConnections();
});

const ask = (id: string, format: string) =>
  call(readSamples, { params: { id }, token: desk.token, path: `/fits/${id}/samples?format=${format}` });

const fileOf = async (id: string, format: SampleFormat) =>
  Buffer.from(await (await ask(id, format)).arrayBuffer());
const sha256 = (bytes: Buffer) => createHash('sha256').update(bytes).digest('hex');

const manifestOf = async (id: string) =>
  manifestSchema.parse(await (await call(readManifest, { params: { id }, token: desk.token })).json());

describe('the sample files of a fit', () => {
  it('are the same draws in every format, with length and checksum in the manifest', async () => {
    startWorker();
    const notebook = await openNotebook(desk, { template: background });
    const id = await startFit(desk, notebook, { seed: 2, maxDraws: 700, replicas: 2, target: { ess: 1e9 } });
    await fitEnded(desk, id);
    // Its worker notes them by itself.
    await expect
      .poll(async () => (await Fit.findByPk(id))?.outputs, { timeout: 20_000 })
      .toMatchObject({ draws: expect.any(Number) });
    const { outputs } = await manifestOf(id);
    expect(outputs.map(({ name }) => name)).toEqual(sampleFormats.map((format) => `samples.${format}`));
    for (const format of sampleFormats) {
      const answer = await ask(id, format);
      expect(answer.headers.get('content-disposition')).toBe(
        `attachment; filename="fit-1-samples.${format}"`,
      );
      const bytes = Buffer.from(await answer.arrayBuffer());
      expect(outputs.find(({ name }) => name.endsWith(`.${format}`))).toMatchObject({
        bytes: bytes.length,
        sha256: sha256(bytes),
      });
    }
    const csv = (await fileOf(id, 'csv')).toString();
    expect(csv.split('\n')[0]).toBe('replica,draw,warmup,log_likelihood,log_prior,c1,c2');
    expect((await fileOf(id, 'ecsv')).toString().endsWith(csv)).toBe(true);
    const { num_rows } = parquetMetadata(new Uint8Array(await fileOf(id, 'parquet')).buffer);
    expect(Number(num_rows)).toBe(2 * (1500 + 700));

    // A second fit of the same snapshot has the same bytes; the kept checksums of the first are still the files'.
    const again = await startFit(desk, notebook, {
      seed: 2,
      maxDraws: 700,
      replicas: 2,
      target: { ess: 1e9 },
    });
    await fitEnded(desk, again);
    expect((await manifestOf(again)).outputs).toEqual(outputs);
    expect((await manifestOf(id)).outputs).toEqual(outputs);
    expect((await Fit.findByPk(id))?.outputs).toMatchObject({ draws: 2200 });
    await endWorkers();
  });

  it('in a format that there isn’t are refused by name', async () => {
    const id = await startFit(desk, await openNotebook(desk, { template: background }), { seed: 1 });
    await stopFit(desk, id);
    const refused = await errorOf(await ask(id, 'fits'));
    expect(refused).toMatchObject({ status: 422, code: 'invalid' });
  });
});

describe('large sample files', () => {
  const draws = 50_000;
  let id: string;
  let width: number;

  /** 4 × 50 000 kept draws of four fields and a background of six terms, made up. */
  beforeAll(async () => {
    const options = { fields: 4, background: [-1, 0, 1, 2, 3, 4] };
    const notebook = await openNotebook(desk, { template: { id: 'free-phase', options } });
    id = await startFit(desk, notebook, { seed: 1, maxDraws: draws });
    await stopFit(desk, id);
    width = 2 + 4 * 3 + 6;
    const rows = 2_000;
    const values = new Float64Array(rows * width);
    for (let from = 0; from < draws; from += rows) {
      for (let i = 0; i < values.length; i++) values[i] = Math.sin(i + from);
      const stored = { firstDraw: 1500 + from, stride: 1, rows, width, values: writeDoubles(values) };
      for (let replica = 0; replica < 4; replica++) await FitBlock.create({ fitId: id, replica, ...stored });
    }
    await Fit.update({ draws: 1500 + draws, status: 'stopped' }, { where: { id } });
  });

  it.each(sampleFormats)('as %s are made in bounded memory and hold up no other request', async (format) => {
    const before = process.memoryUsage().rss;
    let most = 0;
    const watch = setInterval(() => (most = Math.max(most, process.memoryUsage().rss - before)), 10);
    const delay = monitorEventLoopDelay({ resolution: 5 });
    delay.enable();
    let bytes = 0;
    for await (const chunk of (await ask(id, format)).body as unknown as AsyncIterable<Uint8Array>) {
      bytes += chunk.length;
    }
    delay.disable();
    clearInterval(watch);
    const cells = 4 * draws * (width + 4);
    expect(bytes).toBeGreaterThan(8 * cells);
    // The thread's own heap, one pass or row group, and what waits to be sent; the file alone would be up to 110 MB.
    expect(Math.round(most / 1e6)).toBeLessThan(250);
    expect(delay.percentile(99) / 1e6).toBeLessThan(100);
  });
});
