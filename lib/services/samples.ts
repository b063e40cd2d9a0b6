import { createHash } from 'node:crypto';
import { z } from 'zod';
import { Fit } from '@/models';
import {
  endedStatuses,
  fitStatusSchema,
  sampleFormats,
  sha256Schema,
  type Draws,
  type SampleFormat,
} from '@/lib/schemas';
import type { Access } from './access';
import { fitBlocks, servedRows } from './fit-draws';
import { fitColumns, fitModel, specOf, type FitColumns } from './fit-model';
import { findDraws, type FitSource } from './fit-records';
import { strideOf } from './fit-schedule';
import { program } from './program';
import { sampleChunks } from './sample-stream';
import type { SampleSource } from './sample-table';

const outputSchema = z.object({
  format: z.enum(sampleFormats),
  bytes: z.number().int(),
  sha256: sha256Schema,
});
export type StoredOutput = z.infer<typeof outputSchema>;

/** What is kept of the outputs of a fit; column `outputs`. */
const storedOutputsSchema = z.object({
  draws: z.number().int(),
  program: z.string(),
  files: z.array(outputSchema).length(sampleFormats.length),
});

const columnsOf = ({ version, snapshot }: FitSource): FitColumns =>
  fitColumns(specOf(fitModel(version, snapshot)));

const sourceOf = ({ fit, version, snapshot }: FitSource): SampleSource => ({
  fitId: fit.id,
  draws: fit.draws,
  model: fitModel(version, snapshot),
});

export interface SampleFile {
  fileName: string;
  contentType: string;
  stream: ReadableStream<Uint8Array>;
}

const contentTypes: Readonly<Record<SampleFormat, string>> = {
  csv: 'text/csv; charset=utf-8',
  ecsv: 'text/x-ecsv; charset=utf-8',
  parquet: 'application/vnd.apache.parquet',
  npz: 'application/zip',
};

/** The sample file of the fit of `access`, made while it is read: no more than a part is ever in memory. */
export async function openSamples(access: Access, format: SampleFormat): Promise<SampleFile> {
  const source = await findDraws(access);
  const chunks = sampleChunks(sourceOf(source), format);
  // Asked for before the answer begins, so that a refusal is still an answer of its own.
  let first: Awaited<ReturnType<typeof chunks.next>> | null = await chunks.next();
  const stream = new ReadableStream<Uint8Array>(
    {
      async pull(controller) {
        const { done, value } = first ?? (await chunks.next());
        first = null;
        if (done) controller.close();
        else controller.enqueue(value);
      },
      async cancel() {
        await chunks.return();
      },
    },
    { highWaterMark: 1 },
  );
  return {
    fileName: `fit-${source.fit.number}-samples.${format}`,
    contentType: contentTypes[format],
    stream,
  };
}

/** What a sample file comes to: its length and SHA-256. */
async function measure(source: SampleSource, format: SampleFormat): Promise<StoredOutput> {
  const hash = createHash('sha256');
  let bytes = 0;
  for await (const chunk of sampleChunks(source, format)) {
    hash.update(chunk);
    bytes += chunk.byteLength;
  }
  return { format, bytes, sha256: hash.digest('hex') };
}

/**
 * Length and SHA-256 of the sample file in every format as it is now. Those of a fit that has ended are kept, for the draws
 * and the program that they were made of and by.
 */
export async function sampleOutputs(source: FitSource): Promise<StoredOutput[]> {
  const { fit } = source;
  const kept = storedOutputsSchema.safeParse(fit.outputs).data;
  const made = { draws: fit.draws, program: program.program };
  if (kept?.draws === made.draws && kept.program === made.program) return kept.files;
  const files: StoredOutput[] = [];
  for (const format of sampleFormats) files.push(await measure(sourceOf(source), format));
  if (endedStatuses.includes(fitStatusSchema.parse(fit.status))) {
    await Fit.update({ outputs: { ...made, files } }, { where: { id: fit.id, draws: fit.draws } });
  }
  return files;
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
