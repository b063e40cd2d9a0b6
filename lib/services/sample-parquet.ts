import { ByteWriter, ParquetWriter } from 'hyparquet-writer';
import type { SampleTable } from './sample-table';

/** Rows of a group: what has to be in memory to write one. */
const groupRows = 65_536;

/** What is written is taken away after every group; the offsets go on counting. */
class Outflow extends ByteWriter {
  take(): Uint8Array {
    const bytes = this.getBytes().slice();
    this.index = 0;
    return bytes;
  }
}

/** Apache Parquet, one column each, doubles plain and not compressed: draws have no bytes to spare. */
export async function* parquet(table: SampleTable): AsyncGenerator<Uint8Array> {
  const out = new Outflow(1 << 20);
  const writer = new ParquetWriter({
    writer: out,
    codec: 'UNCOMPRESSED',
    createdBy: 'beatnote',
    schema: [
      { name: 'root', num_children: table.columns.length },
      ...table.columns.map(({ name, kind }) => ({
        name,
        type: kind === 'real' ? ('DOUBLE' as const) : ('INT32' as const),
        repetition_type: 'REQUIRED' as const,
      })),
    ],
  });
  const columns = table.columns.map(({ kind }) =>
    kind === 'real' ? new Float64Array(groupRows) : new Int32Array(groupRows),
  );
  let rows = 0;
  const write = () => {
    const columnData = table.columns.map(({ name, kind }, i) => ({
      name,
      data: columns[i].subarray(0, rows),
      ...(kind === 'real' ? { encoding: 'PLAIN' as const } : {}),
    }));
    rows = 0;
    return writer.write({ columnData, rowGroupSize: groupRows });
  };
  for await (const batch of table.batches()) {
    const values = [batch.replica, batch.draw, batch.warmup, ...batch.reals];
    values.forEach((each, i) => columns[i].set(each, rows));
    rows += batch.rows;
    if (rows + batch.rows <= groupRows) continue;
    await write();
    yield out.take();
  }
  if (rows > 0) await write();
  await writer.finish();
  yield out.take();
}
