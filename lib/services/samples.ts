import { createHash } from 'node:crypto';
import type { Draws } from '@/lib/schemas';
import type { Access } from './access';
import { fitBlocks, servedRows } from './fit-draws';
import { fitColumns, fitModel, specOf, type FitColumns } from './fit-model';
import { findDraws, type FitSource } from './fit-records';
import { strideOf } from './fit-schedule';

/** The shortest decimal that reads back as the same double; the sign of a negative zero is kept. */
export const exactDecimal = (value: number): string => (Object.is(value, -0) ? '-0' : String(value));

const columnsOf = ({ version, snapshot }: FitSource): FitColumns =>
  fitColumns(specOf(fitModel(version, snapshot)));

/** Columns of a sample file before the parameters. */
const leading = ['replica', 'draw', 'warmup', 'log_likelihood', 'log_prior'];

export const sampleHeader = ({ sampled, derived }: FitColumns): string[] => [
  ...leading,
  ...sampled,
  ...derived,
];

/**
 * The sample file of a fit, block by block: replica after replica, draws in order and counted from 0 at the start of
 * warm-up. It holds nothing that two runs of one snapshot don't share.
 */
async function* csvOf(source: FitSource): AsyncGenerator<string> {
  const { fit, snapshot } = source;
  const columns = columnsOf(source);
  const served = { warmup: snapshot.warmup, draws: fit.draws };
  const derived = new Float64Array(columns.derived.length);
  yield `${sampleHeader(columns).join(',')}\n`;
  for (let replica = 0; replica < snapshot.replicas; replica++) {
    for await (const block of fitBlocks(fit.id, replica, fit.draws)) {
      let text = '';
      for (const { draw, row } of servedRows(block, served)) {
        const offset = row * block.width;
        columns.derive(block.values, offset, derived);
        text += `${replica},${draw},${draw < snapshot.warmup ? 1 : 0}`;
        for (let i = 0; i < block.width; i++) text += `,${exactDecimal(block.values[offset + i])}`;
        for (const value of derived) text += `,${exactDecimal(value)}`;
        text += '\n';
      }
      yield text;
    }
  }
}

export interface SampleFile {
  fileName: string;
  stream: ReadableStream<Uint8Array>;
}

/** The sample file of the fit of `access`, made while it is read: no more than some blocks are ever in memory. */
export async function openSamples(access: Access): Promise<SampleFile> {
  const source = await findDraws(access);
  const lines = csvOf(source);
  const encoder = new TextEncoder();
  const stream = new ReadableStream<Uint8Array>({
    async pull(controller) {
      // A block of which nothing is served makes no chunk; a pull has to bring one.
      let next = await lines.next();
      while (!next.done && next.value === '') next = await lines.next();
      if (next.done) controller.close();
      else controller.enqueue(encoder.encode(next.value));
    },
    async cancel() {
      await lines.return(undefined);
    },
  });
  return { fileName: `fit-${source.fit.number}-samples.csv`, stream };
}

/** Length and SHA-256 of the sample file as it is now. */
export async function sampleChecksum(source: FitSource): Promise<{ bytes: number; sha256: string }> {
  const hash = createHash('sha256');
  let bytes = 0;
  for await (const text of csvOf(source)) {
    hash.update(text, 'utf8');
    bytes += Buffer.byteLength(text, 'utf8');
  }
  return { bytes, sha256: hash.digest('hex') };
}

/** Seven digits are more than a figure can show. */
const shown = (value: number): number => Number(value.toPrecision(7));

/** Draws of the fit of `access` for figures, at most `max` of all replicas together. */
export async function readDraws(access: Access, max: number): Promise<Draws> {
  const source = await findDraws(access);
  const { fit, snapshot } = source;
  const { warmup, replicas } = snapshot;
  const columns = columnsOf(source);
  const stored = strideOf(fit.draws - warmup);
  const ofWarmup = Math.min(fit.draws, warmup);
  const kept = Math.max(0, fit.draws - warmup);
  const countAt = (stride: number) => Math.ceil(ofWarmup / stride) + Math.ceil(kept / stride);
  let stride = stored;
  while (replicas * countAt(stride) > max && stride < fit.draws) stride += stored;

  const names = [...columns.sampled, ...columns.derived];
  const values = names.map((): number[] => []);
  const answer: Draws = {
    replicas,
    stride,
    replica: [],
    draw: [],
    warmup: [],
    logLikelihood: [],
    columns: Object.fromEntries(names.map((name, i) => [name, values[i]])),
  };
  const derived = new Float64Array(columns.derived.length);
  for (let replica = 0; replica < replicas; replica++) {
    for await (const block of fitBlocks(fit.id, replica, fit.draws)) {
      for (const { draw, row } of servedRows(block, { warmup, draws: fit.draws })) {
        const inWarmup = draw < warmup;
        if ((inWarmup ? draw : draw - warmup) % stride !== 0) continue;
        const offset = row * block.width;
        columns.derive(block.values, offset, derived);
        answer.replica.push(replica);
        answer.draw.push(draw);
        answer.warmup.push(inWarmup ? 1 : 0);
        answer.logLikelihood.push(shown(block.values[offset]));
        columns.sampled.forEach((_, i) => values[i].push(shown(block.values[offset + 2 + i])));
        derived.forEach((value, i) => values[columns.sampled.length + i].push(shown(value)));
      }
    }
  }
  return answer;
}
