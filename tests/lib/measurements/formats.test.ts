import { describe, expect, it } from 'vitest';
import { applyMapping, parseMatrix, parseMeasurement } from '@/lib/measurements';
import {
  fitsData,
  fitsHeader,
  fitsTable,
  float64,
  gzip,
  join,
  npy,
  packed,
  primary,
  zip,
} from './binary-files';
import { errorOf, file, load, placesOf } from './measurement-files';

const table = (bytes: Uint8Array, name: string) => parseMeasurement(bytes, name);
const header = (descr: string, shape: string, fortran = 'False') =>
  `{'descr': ${descr}, 'fortran_order': ${fortran}, 'shape': ${shape}, }`;

describe('NPY arrays', () => {
  it.each([
    ["'<i2'", packed(2, [1, -2, 3, 4], (view, at, value) => view.setInt16(at, value, true))],
    ["'>i4'", packed(4, [1, -2, 3, 4], (view, at, value) => view.setInt32(at, value))],
    ["'<i8'", packed(8, [1, -2, 3, 4], (view, at, value) => view.setBigInt64(at, BigInt(value), true))],
    ["'|i1'", packed(1, [1, -2, 3, 4], (view, at, value) => view.setInt8(at, value))],
    // 1, −2, 3, 4 as IEEE 754 binary16.
    [
      "'<f2'",
      packed(2, [0x3c00, 0xc000, 0x4200, 0x4400], (view, at, value) => view.setUint16(at, value, true)),
    ],
    ["'>f4'", packed(4, [1, -2, 3, 4], (view, at, value) => view.setFloat32(at, value))],
  ])('of type %s', (descr, data) => {
    const read = table(npy(header(descr, '(2, 2)'), data), 'a.npy');
    expect(read.data.map((column) => [...column])).toEqual([
      [1, 3],
      [-2, 4],
    ]);
  });

  it('of format version 2.0, and of records with padding, words and arrays among their fields', () => {
    const descr = "[('kappa', '<f8'), ('', '|V4'), ('label', '<U2'), ('S', '<f4'), ('pair', '<f4', (2,))]";
    const row = (kappa: number, S: number): Uint8Array =>
      join(
        float64([kappa]),
        new Uint8Array(12),
        packed(4, [S, 9, 9], (view, at, value) => view.setFloat32(at, value, true)),
      );
    const read = table(npy(header(descr, '(2,)'), join(row(0.1, 5), row(0.2, 6)), 2), 'a.npy');
    expect(read.columns.map(({ name }) => name)).toEqual(['kappa', 'S']);
    expect(read.data.map((column) => [...column])).toEqual([
      [0.1, 0.2],
      [5, 6],
    ]);
    expect(placesOf(read.findings, 'warning')).toEqual([['unread-column'], ['unread-column']]);
  });

  it('of Python objects are refused: nothing is unpickled', () => {
    const error = errorOf(() => table(npy(header("'|O'", '(2,)'), new Uint8Array(80)), 'a.npy'));
    expect([error.code, error.message]).toEqual([
      'format-not-read',
      'This is an array of Python objects, which is not read.',
    ]);
    const field = errorOf(() => table(npy(header("[('a', '|O')]", '(2,)'), new Uint8Array(80)), 'a.npy'));
    expect(field.code).toBe('format-not-read');
  });

  it('that are cut off, announce too much or hold code in their header are damaged', () => {
    const whole = npy(header("'<f8'", '(2, 2)'), float64([1, 2, 3, 4]));
    expect(errorOf(() => table(whole.slice(0, -1), 'a.npy')).code).toBe('damaged-file');
    expect(errorOf(() => table(whole.slice(0, 20), 'a.npy')).code).toBe('damaged-file');
    for (const text of [
      header("'<f8'", '(__import__("os").system("true"), 2)'),
      header("'<f8'", '(-1, 2)'),
      header("'<f8'", '(1e3, 2)'),
      "{'descr': '<f8'}",
      '['.repeat(5000),
      '',
    ]) {
      expect([text.slice(0, 40), errorOf(() => table(npy(text, new Uint8Array(64)), 'a.npy')).code]).toEqual([
        text.slice(0, 40),
        'damaged-file',
      ]);
    }
    const huge = npy(header("'|u1'", '(4000000000, 2)'), new Uint8Array(64));
    expect(errorOf(() => table(huge, 'a.npy')).code).toBe('file-too-large');
  });

  it('with bytes behind them are read with a warning, and NaN is named by row and column', () => {
    const read = table(npy(header("'<f8'", '(2, 2)'), float64([1, 2, NaN, 4, 5])), 'a.npy');
    expect(placesOf(read.findings, 'warning')).toEqual([['trailing-bytes']]);
    expect(placesOf(read.findings, 'error')).toEqual([['not-finite', 2, 1]]);
  });
});

describe('archives', () => {
  const array = npy(header("'<f8'", '(2,)'), float64([1, 2]));
  const square = npy(header("'<f8'", '(2, 2)'), float64([4, 1, 1, 4]));

  it('of arrays give columns by name; a matrix is found by its name', () => {
    const read = table(zip({ 'kappa.npy': array, 'S.npy': array }), 'a.npz');
    expect(read.columns.map(({ name }) => name)).toEqual(['kappa', 'S']);
    const both = zip({ 'covariance.npy': square, 'correlation.npy': square });
    expect([...parseMatrix(both, 'c.npz', { part: 'covariance' }).data]).toEqual([4, 1, 1, 4]);
    expect(errorOf(() => parseMatrix(both, 'm.npz', { part: 'mocks' })).code).toBe('several-tables');
  });

  it('and gzip that unpack to more than the limit are refused while they are unpacked', () => {
    const bomb = new Uint8Array(80 * 1024 * 1024);
    for (const bytes of [gzip(bomb), zip({ 'a.npy': bomb })]) {
      const begun = performance.now();
      expect(errorOf(() => table(bytes, 'a.npz')).code).toBe('file-too-large');
      expect(performance.now() - begun).toBeLessThan(2000);
    }
  });

  it('that announce another length than they have, or are altered, are damaged', () => {
    const bytes = zip({ 'kappa.npy': array, 'S.npy': array });
    const lying = bytes.slice();
    // The uncompressed size of the first entry in the central directory.
    const directory = lying.findIndex(
      (_, i) => lying[i] === 0x50 && lying[i + 1] === 0x4b && lying[i + 2] === 1,
    );
    lying[directory + 24] = 7;
    expect(errorOf(() => table(lying, 'a.npz')).code).toBe('damaged-file');
    const packedText = gzip(file('kappa,S\n0.1,1\n0.2,2\n').bytes);
    expect(table(packedText, 'a.csv.gz').rows).toBe(2);
    const altered = packedText.slice();
    altered[altered.length - 6] ^= 1;
    expect(errorOf(() => table(altered, 'a.csv.gz')).code).toBe('damaged-file');
    expect(errorOf(() => table(gzip(packedText), 'a.gz')).message).toContain('gzip archive within another');
  });
});

describe('FITS', () => {
  it('tables have their scales, their missing whole numbers and their tables beyond the first', () => {
    const rows = join(
      ...[
        [3, 0.1],
        [-1, 0.2],
      ].map(([n, kappa]) =>
        join(
          packed(2, [n], (view, at, value) => view.setInt16(at, value)),
          float64([kappa], false),
        ),
      ),
    );
    const columns = [
      { form: 'I', name: 'S' },
      { form: '1D', name: 'kappa' },
    ];
    const further = [
      'TSCAL1  =                  0.5',
      'TZERO1  =                   10',
      'TNULL1  =                   -1',
    ];
    const one = fitsTable(columns, 10, rows, further);
    const read = table(one, 'a.fits');
    expect(read.columns.map(({ name }) => name)).toEqual(['S', 'kappa']);
    expect([read.data[0][0], read.data[1][1]]).toEqual([11.5, 0.2]);
    expect(placesOf(read.findings, 'error')).toEqual([['not-finite', 2, 1]]);
    const two = join(one, one.slice(primary.length));
    expect(placesOf(table(two, 'a.fits').findings, 'warning')).toEqual([['several-tables']]);
    expect(table(gzip(one), 'a.fits.gz').rows).toBe(2);
  });

  it('images are matrices, first axis along a row', () => {
    const image = join(
      fitsHeader([
        'SIMPLE  =                    T',
        'BITPIX  =                  -64',
        'NAXIS   =                    2',
        'NAXIS1  =                    3',
        'NAXIS2  =                    2',
      ]),
      fitsData(float64([1, 2, 3, 4, 5, 6], false)),
    );
    const matrix = parseMatrix(image, 'mocks.fits', { part: 'mocks' });
    expect([matrix.rows, matrix.columns, [...matrix.data]]).toEqual([2, 3, [1, 2, 3, 4, 5, 6]]);
    expect(errorOf(() => table(image, 'a.fits')).message).toContain('without a binary table');
  });

  it('files that are cut off are damaged', () => {
    const { bytes } = load('files/table.fits');
    for (const length of [100, 2880, 3000, 5760, 6000]) {
      const error = errorOf(() => table(bytes.slice(0, length), 'a.fits'));
      expect(['damaged-file', 'format-not-read']).toContain(error.code);
    }
  });
});

describe('ECSV', () => {
  const ecsv = (yaml: string, body: string) => file(`# %ECSV 1.0\n# ---\n${yaml}\n${body}`, 'a.ecsv').bytes;
  const columns = '# datatype:\n# - {name: kappa, datatype: float64}\n# - {name: S, datatype: float64}';

  it('reads quoted and empty cells as cells', () => {
    const read = table(ecsv(columns, 'kappa S\n0.1 "1.5"\n0.2 ""\n'), 'a.ecsv');
    expect(read.data[1][0]).toBe(1.5);
    expect(placesOf(read.findings, 'error')).toEqual([['empty-cell', 8, 2]]);
  });

  it('refuses names that differ from the header, YAML that can’t be read, aliases and other versions', () => {
    for (const [bytes, code] of [
      [ecsv(columns, 'kappa T\n0.1 1\n'), 'damaged-file'],
      [ecsv('# datatype: [{name: ', 'kappa S\n0.1 1\n'), 'damaged-file'],
      [ecsv('# a: &a [1, 1]\n# b: [*a, *a]\n# datatype: []', 'kappa S\n0.1 1\n'), 'damaged-file'],
      [ecsv(`# datatype: ${'['.repeat(9000)}`, 'kappa S\n0.1 1\n'), 'damaged-file'],
      [file('# %ECSV 2.0\n# ---\n# datatype: []\nkappa S\n', 'a.ecsv').bytes, 'format-not-read'],
    ] as const) {
      expect(errorOf(() => table(bytes, 'a.ecsv')).code).toBe(code);
    }
  });
});

describe('units of wavenumbers', () => {
  const withUnits = (long: string, short: string) =>
    table(file(`k_long [${long}],k_short [${short}],S\n0.01,0.1,1\n0.02,0.1,2\n`).bytes, 'a.csv');
  const mapped = (long: string, short: string) =>
    applyMapping(withUnits(long, short), { kLong: 0, kShort: 1, S: 2 });

  it('are brought to one where a metric prefix makes the difference', () => {
    const { measurement, findings } = mapped('h/Gpc', 'h Mpc^-1');
    expect(measurement?.kappa[0]).toBeCloseTo(1e-4, 15);
    expect(placesOf(findings, 'note')).toEqual([['units-converted', 1, 1]]);
    expect(mapped('1/Mpc', 'Mpc-1').findings).toEqual([]);
  });

  it('stop the reading where one has h and the other has not', () => {
    expect(placesOf(mapped('h/Mpc', '1/Mpc').findings, 'error')).toEqual([['units-differ', 1, 1]]);
  });

  it('may stand in a line of their own below the names', () => {
    const read = table(
      file('k_long,k_short,S,sigma\nh/Mpc,h/Mpc,-,\n0.01,0.1,1,1\n0.02,0.1,2,1\n').bytes,
      'a.csv',
    );
    expect(read.columns.map(({ unit }) => unit)).toEqual(['h/Mpc', 'h/Mpc', undefined, undefined]);
    expect([read.rows, read.findings]).toEqual([2, []]);
  });
});

describe('a file over the limit', () => {
  it('is refused by its size alone, whatever it is', () => {
    const bytes = new Uint8Array(65 * 1024 * 1024);
    const begun = performance.now();
    expect(errorOf(() => table(bytes, 'a.fits')).code).toBe('file-too-large');
    expect(performance.now() - begun).toBeLessThan(100);
  });
});
