import { parentPort, workerData } from 'node:worker_threads';
import type { SampleFormat } from '@/lib/schemas';
import { closeDatabase, database } from '@/lib/db';
import { yieldToOthers } from '@/lib/niceness';
import { encodeSamples } from './sample-encoders';
import { sampleTable, type SampleSource } from './sample-table';

export interface SampleOrder {
  source: SampleSource;
  format: SampleFormat;
}

/** A chunk, the end (null), or what went wrong. */
export type SampleAnswer =
  | { kind: 'chunk'; chunk: Uint8Array<ArrayBuffer> | null }
  | { kind: 'failure'; message: string; databaseAway: boolean };

/**
 * The entry of a thread that makes one sample file: each message asks for the next chunk, so that a slow reader holds up
 * nothing but this thread. It is bundled by itself and started by its path.
 */
const port = parentPort;
const { source, format } = workerData as SampleOrder;
yieldToOthers();
database();
const chunks = encodeSamples(format, sampleTable(source));
const answer = (message: SampleAnswer, transfer: ArrayBuffer[] = []) => port?.postMessage(message, transfer);

port?.on('message', () => {
  chunks.next().then(
    async ({ done, value }) => {
      if (!done) return answer({ kind: 'chunk', chunk: value }, [value.buffer]);
      answer({ kind: 'chunk', chunk: null });
      await closeDatabase();
      port.close();
    },
    (error: unknown) => {
      const databaseAway = error instanceof Error && error.name.startsWith('SequelizeConnection');
      const message = error instanceof Error ? error.message : String(error);
      answer({ kind: 'failure', message, databaseAway });
    },
  );
});
