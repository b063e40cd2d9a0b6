import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { parquetMetadata, parquetReadObjects } from 'hyparquet';
import { parse } from 'yaml';
import { describe, expect, it } from 'vitest';
import { sampleFormats, type SampleFormat } from '@/lib/schemas';
import { encodeSamples } from '@/lib/services/sample-encoders';
import { npyHeader } from '@/lib/services/sample-npz';
import { batchRows, type SampleBatch, type SampleTable } from '@/lib/services/sample-table';

/** Values that a format must not round, sign or lose. */
const awkward = [-0, 1 / 3, 5e-324, 1.7976931348623157e308, NaN, -Infinity, 0.1 + 0.2, -2.5];

/** A table of made-up draws: two replicas, one of the reals derived. */
function tableOf(rows: number): SampleTable {
  const names = ['log_likelihood', 'log_prior', 'mu1', 'theta', 'm2_11'];
  const value = (column: number, row: number) =>
    row < awkward.length
      ? awkward[(row + column) % awkward.length]
      : Math.sin(row * 5 + column) * 10 ** (row % 7);
  const rowAt = (row: number) => ({ replica: row < rows / 2 ? 0 : 1, draw: row % Math.ceil(rows / 2) });
  return {
    rows,
    columns: [
      { name: 'replica', kind: 'count', unit: '', description: 'chain' },
      { name: 'draw', kind: 'count', unit: '', description: 'draw' },
      { name: 'warmup', kind: 'flag', unit: '', description: 'of warm-up: 1, else "0"' },
      ...names.map((name) => ({
        name,
        kind: 'real' as const,
        unit: name === 'theta' ? 'rad' : '',
        description: `${name}: κ², in units of H`,
      })),
    ],
    async *batches() {
      for (let from = 0; from < rows; from += batchRows) {
        const count = Math.min(batchRows, rows - from);
        const batch: SampleBatch = {
          rows: count,
          replica: Int32Array.from({ length: count }, (_, i) => rowAt(from + i).replica),
          draw: Int32Array.from({ length: count }, (_, i) => rowAt(from + i).draw),
          warmup: Uint8Array.from({ length: count }, (_, i) => (rowAt(from + i).draw < 3 ? 1 : 0)),
          reals: names.map((_, c) => Float64Array.from({ length: count }, (__, i) => value(c, from + i))),
        };
        yield await Promise.resolve(batch);
      }
    },
  };
}

async function bytesOf(format: SampleFormat, table: SampleTable): Promise<Buffer> {
  const chunks: Uint8Array[] = [];
  for await (const chunk of encodeSamples(format, table)) chunks.push(chunk);
  return Buffer.concat(chunks);
}

/** Every row as the batches hold it. */
async function rowsOf(table: SampleTable): Promise<number[][]> {
  const rows: number[][] = [];
  for await (const { rows: count, replica, draw, warmup, reals } of table.batches()) {
    for (let i = 0; i < count; i++) rows.push([replica[i], draw[i], warmup[i], ...reals.map((r) => r[i])]);
  }
  return rows;
}

const same = (found: number[][], wanted: number[][]) => {
  expect(found).toHaveLength(wanted.length);
  const off = found.findIndex((row, i) => !row.every((value, c) => Object.is(value, wanted[i][c])));
  expect(off === -1 ? null : { row: off, found: found[off], wanted: wanted[off] }).toBeNull();
};

const decimals = (line: string) => line.split(',').map(Number);
const long = tableOf(2 * batchRows + 77);

describe('a sample file', () => {
  it.each(sampleFormats)('as %s has the same bytes each time it is made', async (format) => {
    const hash = async () =>
      createHash('sha256')
        .update(await bytesOf(format, tableOf(20_000)))
        .digest('hex');
    expect(await hash()).toBe(await hash());
  });

  it('as CSV reads back to the very doubles, under one line of names', async () => {
    const [head, ...lines] = (await bytesOf('csv', long)).toString().trimEnd().split('\n');
    expect(head).toBe('replica,draw,warmup,log_likelihood,log_prior,mu1,theta,m2_11');
    same(lines.map(decimals), await rowsOf(long));
  });

  it('as ECSV has the header of version 1.0 and below it the lines of the CSV', async () => {
    const text = (await bytesOf('ecsv', long)).toString();
    const lines = text.split('\n');
    const header = lines.filter((line) => line.startsWith('# ')).map((line) => line.slice(2));
    // Astropy Proposal for Enhancement 6: the version, then a YAML document with a `datatype` entry for each column.
    expect(header.slice(0, 2)).toEqual(['%ECSV 1.0', '---']);
    const facts = parse(header.slice(2).join('\n')) as {
      delimiter: string;
      datatype: { name: string; datatype: string; unit?: string; description: string }[];
    };
    expect(facts.delimiter).toBe(',');
    expect(facts.datatype.map(({ name }) => name)).toEqual(long.columns.map(({ name }) => name));
    expect(facts.datatype.slice(0, 4).map(({ datatype }) => datatype)).toEqual([
      'int64',
      'int64',
      'int8',
      'float64',
    ]);
    expect(facts.datatype.map(({ description }) => description)).toEqual(
      long.columns.map(({ description }) => description),
    );
    expect(facts.datatype.filter(({ unit }) => unit !== undefined)).toMatchObject([
      { name: 'theta', unit: 'rad' },
    ]);
    expect(lines.slice(header.length).join('\n')).toBe((await bytesOf('csv', long)).toString());
  });

  it('as Parquet is read by a reader of the format to the very doubles, over several row groups', async () => {
    const table = tableOf(150_000);
    const file = await bytesOf('parquet', table);
    const buffer = new Uint8Array(file).buffer;
    const { num_rows, row_groups, schema } = parquetMetadata(buffer);
    expect([num_rows, row_groups.length]).toEqual([150_000n, 3]);
    expect(schema.slice(1).map(({ name, type }) => `${name} ${type}`)).toEqual(
      table.columns.map(({ name, kind }) => `${name} ${kind === 'real' ? 'DOUBLE' : 'INT32'}`),
    );
    const rows = (await parquetReadObjects({ file: buffer })) as Record<string, number>[];
    same(
      rows.map((row) => table.columns.map(({ name }) => row[name])),
      await rowsOf(table),
    );
  });

  it('as NPZ is an archive that Python opens, of arrays as NumPy’s format describes them', async () => {
    const folder = mkdtempSync(path.join(tmpdir(), 'beatnote-npz-'));
    const file = path.join(folder, 'samples.npz');
    writeFileSync(file, await bytesOf('npz', long));
    // Without NumPy: the archive by zipfile, which checks every CRC; header and values by hand as the format says.
    const script = `
import ast, json, struct, sys, zipfile
out = {}
with zipfile.ZipFile(sys.argv[1]) as z:
    assert z.testzip() is None
    for info in z.infolist():
        assert info.compress_type == zipfile.ZIP_STORED
        b = z.read(info)
        assert b[:8] == b'\\x93NUMPY\\x01\\x00', b[:8]
        n = struct.unpack('<H', b[8:10])[0]
        assert (10 + n) % 64 == 0 and b[9 + n] == 10
        head = ast.literal_eval(b[10:10 + n].decode('ascii'))
        assert head['fortran_order'] is False
        code = {'<f8': 'd', '<i8': 'q', '|i1': 'b'}[head['descr']]
        (rows,) = head['shape']
        values = struct.unpack('<%d%s' % (rows, code), b[10 + n:])
        out[info.filename] = [head['descr'], [v.hex() if code == 'd' else v for v in values]]
print(json.dumps(out))`;
    const read = JSON.parse(
      execFileSync('python3', ['-c', script, file], { encoding: 'utf8', maxBuffer: 1e9 }),
    ) as Record<string, [string, (number | string)[]]>;
    rmSync(folder, { recursive: true });
    expect(Object.keys(read)).toEqual(long.columns.map(({ name }) => `${name}.npy`));
    const rows = await rowsOf(long);
    const hex = (value: number) =>
      execFileSync('python3', ['-c', 'import sys; print(float(sys.argv[1]).hex())', String(value)], {
        encoding: 'utf8',
      }).trim();
    for (const [c, { name, kind }] of long.columns.entries()) {
      const [descr, values] = read[`${name}.npy`];
      expect(descr).toBe({ count: '<i8', flag: '|i1', real: '<f8' }[kind]);
      expect(values).toHaveLength(rows.length);
      if (kind === 'real') expect(values[9]).toBe(hex(rows[9][c]));
      else expect(values).toEqual(rows.map((row) => row[c]));
    }
    expect(read['mu1.npy'][1].slice(0, 8)).toEqual([
      ...['0x0.0000000000001p-1022', '0x1.fffffffffffffp+1023', 'nan', '-inf'],
      ...['0x1.3333333333334p-2', '-0x1.4000000000000p+1', '-0x0.0p+0', '0x1.5555555555555p-2'],
    ]);
  });

  it.each(sampleFormats)('as %s of a fit without a draw has its columns and no row', async (format) => {
    const bytes = await bytesOf(format, tableOf(0));
    if (format === 'parquet') expect(parquetMetadata(new Uint8Array(bytes).buffer).num_rows).toBe(0n);
    else expect(bytes.includes('theta')).toBe(true);
  });
});

describe('the header of an array file', () => {
  it('is the one that the format’s documentation describes', () => {
    const header = Buffer.from(npyHeader('<f8', 3)).toString('latin1');
    expect(header).toBe(
      `\x93NUMPY\x01\x00\x76\x00{'descr': '<f8', 'fortran_order': False, 'shape': (3,), }`.padEnd(127) + '\n',
    );
    for (const rows of [0, 99_999, 10 ** 9, 10 ** 12]) expect(npyHeader('|i1', rows).length % 64).toBe(0);
  });
});
