import { existsSync } from 'node:fs';
import path from 'node:path';
import { Worker } from 'node:worker_threads';
import { AppError } from '@/lib/errors';
import { log } from '@/lib/log';
import type { SampleFormat } from '@/lib/schemas';
import { Places } from './places';
import { encodeSamples } from './sample-encoders';
import { sampleTable, type SampleSource } from './sample-table';
import type { SampleAnswer, SampleOrder } from './sample-thread';

/** Heap of a thread; the numbers lie outside it, and are bounded by the formats themselves. */
const heapMegabytes = 256;

/** How long a reader may leave a chunk lying before its thread is taken from it. */
const patience = 60_000;

const places = new Places(
  4,
  16,
  'Many sample files are being made just now. Nothing is lost; ask again in a minute.',
);

type Chunks = AsyncGenerator<Uint8Array<ArrayBuffer>, void>;

function failed({ message, databaseAway }: { message: string; databaseAway: boolean }): Error {
  if (!databaseAway) return new Error(`A sample file could not be made: ${message}`);
  return new AppError(
    'unavailable',
    'The database is away for a moment. Nothing was lost; try again shortly.',
  );
}

async function* fromThread(bundle: string, order: SampleOrder): Chunks {
  const release = await places.take();
  const thread = new Worker(/* turbopackIgnore: true */ bundle, {
    workerData: order,
    resourceLimits: { maxOldGenerationSizeMb: heapMegabytes },
    execArgv: [],
  });
  let settle: ((answer: SampleAnswer | Error) => void) | undefined;
  let broken: Error | undefined;
  const fail = (error: Error) => {
    broken ??= error;
    settle?.(broken);
  };
  thread.on('message', (answer: SampleAnswer) => settle?.(answer));
  thread.on('messageerror', fail);
  thread.on('error', fail);
  thread.on('exit', (code) => fail(new Error(`The thread of a sample file ended with code ${code}.`)));
  let timer: NodeJS.Timeout | undefined;
  try {
    for (;;) {
      const answer = await new Promise<SampleAnswer | Error>((resolve) => {
        settle = resolve;
        if (broken) resolve(broken);
        else thread.postMessage('next');
      });
      if (answer instanceof Error) throw answer;
      if (answer.kind === 'failure') throw failed(answer);
      if (answer.chunk === null) return;
      timer = setTimeout(() => {
        log.warn('a sample file was left lying by its reader and given up');
        fail(new Error('The reader of a sample file stood still.'));
        void thread.terminate();
        release();
      }, patience);
      yield answer.chunk;
      clearTimeout(timer);
    }
  } finally {
    clearTimeout(timer);
    await thread.terminate();
    release();
  }
}

/** The sample file of a source, made in a thread of its own while it is read. */
export function sampleChunks(source: SampleSource, format: SampleFormat): Chunks {
  // By path and at run time: a bundler that followed it would make the thread a part of the pages.
  const bundle = path.join(/* turbopackIgnore: true */ process.cwd(), 'dist', 'worker', 'sample-thread.mjs');
  if (existsSync(bundle)) return fromThread(bundle, { source, format });
  log.warn({ bundle }, 'a sample file is made in line: the thread is not built');
  return encodeSamples(format, sampleTable(source));
}
