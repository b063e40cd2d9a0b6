import { Zip, ZipPassThrough } from 'fflate';
import type { SampleBatch, SampleColumn, SampleTable } from './sample-table';

/** Bytes of columns that are gathered in one pass over the draws; a table beyond takes more passes. */
const passBytes = 32e6;

/** Bytes of a column that are handed on at once. */
const pieceBytes = 1 << 20;

/** The earliest moment that a zip archive can name: the same file has the same bytes whenever it is made. */
const noDate = new Date(1980, 0, 1);

const kinds: Readonly<Record<SampleColumn['kind'], { descr: string; bytes: number }>> = {
  count: { descr: '<i8', bytes: 8 },
  flag: { descr: '|i1', bytes: 1 },
  real: { descr: '<f8', bytes: 8 },
};

/**
 * The header of an array file, format version 1.0: magic, version, length as little-endian 16 bits, a Python dictionary
 * padded with spaces to a multiple of 64 bytes in all and ended by a newline.
 * Source: NumPy Enhancement Proposal 1 and the documentation of numpy.lib.format.
 */
export function npyHeader(descr: string, rows: number): Uint8Array {
  const dictionary = `{'descr': '${descr}', 'fortran_order': False, 'shape': (${rows},), }`;
  const before = 10;
  const length = Math.ceil((before + dictionary.length + 1) / 64) * 64 - before;
  const header = new Uint8Array(before + length);
  header.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0, length & 0xff, length >> 8]);
  header.set(new TextEncoder().encode(`${dictionary.padEnd(length - 1)}\n`), before);
  return header;
}

/** Copies column `index` of a batch to row `at` of what will be the file's bytes. */
function copy(batch: SampleBatch, index: number, into: DataView, at: number): void {
  if (index === 2) {
    for (let row = 0; row < batch.rows; row++) into.setUint8(at + row, batch.warmup[row]);
  } else if (index < 2) {
    const values = index === 0 ? batch.replica : batch.draw;
    for (let row = 0; row < batch.rows; row++) into.setBigInt64((at + row) * 8, BigInt(values[row]), true);
  } else {
    const values = batch.reals[index - 3];
    for (let row = 0; row < batch.rows; row++) into.setFloat64((at + row) * 8, values[row], true);
  }
}

/** Indices of columns that are gathered together. */
function passesOf(table: SampleTable): number[][] {
  const passes: number[][] = [];
  let bytes = Infinity;
  table.columns.forEach(({ kind }, index) => {
    const more = kinds[kind].bytes * table.rows;
    if (bytes + more > passBytes) {
      passes.push([]);
      bytes = 0;
    }
    passes[passes.length - 1].push(index);
    bytes += more;
  });
  return passes;
}

/** NumPy's archive: a zip of one array file a column, stored as it is. */
export async function* npz(table: SampleTable): AsyncGenerator<Uint8Array> {
  let made: Uint8Array[] = [];
  const zip = new Zip((error, chunk) => {
    if (error) throw error;
    made.push(chunk);
  });
  const taken = () => {
    const chunks = made;
    made = [];
    return chunks;
  };
  for (const pass of passesOf(table)) {
    const buffers = pass.map((index) => new ArrayBuffer(kinds[table.columns[index].kind].bytes * table.rows));
    const views = buffers.map((buffer) => new DataView(buffer));
    let at = 0;
    for await (const batch of table.batches()) {
      pass.forEach((index, i) => copy(batch, index, views[i], at));
      at += batch.rows;
    }
    for (const [i, index] of pass.entries()) {
      const { name, kind } = table.columns[index];
      const file = new ZipPassThrough(`${name}.npy`);
      file.mtime = noDate;
      zip.add(file);
      const bytes = new Uint8Array(buffers[i]);
      file.push(npyHeader(kinds[kind].descr, table.rows), bytes.length === 0);
      for (let from = 0; from < bytes.length; from += pieceBytes) {
        file.push(bytes.subarray(from, from + pieceBytes), from + pieceBytes >= bytes.length);
        yield* taken();
      }
    }
  }
  zip.end();
  yield* taken();
}
