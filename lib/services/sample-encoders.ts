import type { SampleFormat } from '@/lib/schemas';
import { npz } from './sample-npz';
import { parquet } from './sample-parquet';
import type { SampleTable } from './sample-table';
import { csv, ecsv } from './sample-text';

/** Chunks that are handed on hold at least this many bytes, but the last. */
const chunkBytes = 256 * 1024;

const encoders: Readonly<Record<SampleFormat, (table: SampleTable) => AsyncGenerator<Uint8Array>>> = {
  csv,
  ecsv,
  parquet,
  npz,
};

/** The sample file in one of the formats, in chunks of memory of their own. */
export async function* encodeSamples(
  format: SampleFormat,
  table: SampleTable,
): AsyncGenerator<Uint8Array<ArrayBuffer>> {
  let waiting: Uint8Array[] = [];
  let bytes = 0;
  const joined = () => {
    const chunk = new Uint8Array(bytes);
    let at = 0;
    for (const each of waiting) {
      chunk.set(each, at);
      at += each.length;
    }
    waiting = [];
    bytes = 0;
    return chunk;
  };
  for await (const part of encoders[format](table)) {
    waiting.push(part);
    bytes += part.length;
    if (bytes >= chunkBytes) yield joined();
  }
  if (bytes > 0) yield joined();
}
