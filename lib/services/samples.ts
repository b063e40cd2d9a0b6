import { createHash } from 'node:crypto';
import { z } from 'zod';
import { Fit } from '@/models';
import {
  endedStatuses,
  fitStatusSchema,
  sampleFormats,
  sha256Schema,
  type SampleFormat,
} from '@/lib/schemas';
import type { Access } from './access';
import { fitModel } from './fit-model';
import { findDraws, readSource, type FitSource } from './fit-records';
import { program } from './program';
import { sampleChunks } from './sample-stream';
import type { SampleSource } from './sample-table';
import { SharedReads } from './shared-reads';

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

const sourceOf = ({ fit, numbers, snapshot }: FitSource): SampleSource => ({
  fitId: fit.id,
  draws: fit.draws,
  model: fitModel(numbers, snapshot),
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

/** Whoever asks for the same files together is told from one making of them. */
const measuring = new SharedReads<StoredOutput[]>();

/**
 * Length and SHA-256 of the sample file in every format as it is now. Those of a fit that has ended are kept, for the draws
 * and the program that they were made of and by.
 */
export async function sampleOutputs(source: FitSource): Promise<StoredOutput[]> {
  const { fit } = source;
  const kept = storedOutputsSchema.safeParse(fit.outputs).data;
  const made = { draws: fit.draws, program: program.program };
  if (kept?.draws === made.draws && kept.program === made.program) return kept.files;
  const files = await measuring.read(`${fit.id} ${fit.draws}`, () =>
    Promise.all(sampleFormats.map((format) => measure(sourceOf(source), format))),
  );
  if (endedStatuses.includes(fitStatusSchema.parse(fit.status))) {
    await Fit.update({ outputs: { ...made, files } }, { where: { id: fit.id, draws: fit.draws } });
  }
  return files;
}

/** Notes the outputs of a fit that has ended, for its worker: whoever asks for the manifest first needn't wait for them to be made. */
export async function keepOutputs(fitId: string): Promise<void> {
  const fit = await Fit.findByPk(fitId);
  if (fit && fit.draws > 0) await sampleOutputs(await readSource(fit));
}
