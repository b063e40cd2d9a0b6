import { stringify } from 'yaml';
import type { SampleBatch, SampleColumn, SampleTable } from './sample-table';

/** The shortest decimal that reads back as the same double; the sign of a negative zero is kept. */
export const exactDecimal = (value: number): string => (Object.is(value, -0) ? '-0' : String(value));

/** Rows that are made into text at once: a whole batch as one string would be megabytes. */
const linesAtOnce = 1_024;

function* lines(batch: SampleBatch): Generator<string> {
  const { replica, draw, warmup, reals } = batch;
  for (let from = 0; from < batch.rows; from += linesAtOnce) {
    const to = Math.min(batch.rows, from + linesAtOnce);
    let text = '';
    for (let row = from; row < to; row++) {
      text += `${replica[row]},${draw[row]},${warmup[row]}`;
      for (const values of reals) text += `,${exactDecimal(values[row])}`;
      text += '\n';
    }
    yield text;
  }
}

async function* delimited(head: string, table: SampleTable): AsyncGenerator<Uint8Array> {
  const encoder = new TextEncoder();
  yield encoder.encode(`${head}${table.columns.map(({ name }) => name).join(',')}\n`);
  for await (const batch of table.batches()) {
    for (const text of lines(batch)) yield encoder.encode(text);
  }
}

/** Comma-separated values with one line of names. */
export const csv = (table: SampleTable): AsyncGenerator<Uint8Array> => delimited('', table);

const datatypes: Readonly<Record<SampleColumn['kind'], string>> = {
  count: 'int64',
  flag: 'int8',
  real: 'float64',
};

/** One entry of the header: what the column holds, in one line of YAML. */
function entry({ name, kind, unit, description }: SampleColumn): string {
  const facts = { name, ...(unit ? { unit } : {}), datatype: datatypes[kind], description };
  return stringify(facts, { collectionStyle: 'flow', lineWidth: 0 }).trim();
}

/**
 * Enhanced character-separated values 1.0 (Astropy Proposal for Enhancement 6): the same lines under a YAML header with
 * the type, unit and meaning of every column.
 */
export function ecsv(table: SampleTable): AsyncGenerator<Uint8Array> {
  const header = [
    '%ECSV 1.0',
    '---',
    "delimiter: ','",
    'datatype:',
    ...table.columns.map((column) => `- ${entry(column)}`),
  ];
  return delimited(header.map((line) => `# ${line}\n`).join(''), table);
}
