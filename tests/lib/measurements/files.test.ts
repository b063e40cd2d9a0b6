import { describe, expect, it } from 'vitest';
import { checkCovariance, parseMatrix, parseMeasurement } from '@/lib/measurements';
import { errorOf, load, loadText, placesOf } from './measurement-files';

interface Expected {
  verdict: string;
  expected?: {
    n_rows: number;
    columns: string[];
    column_sums_of_finite: Record<string, number>;
    non_finite: Record<string, number>;
    first_row: number[];
    last_row: number[];
  };
}

const all = JSON.parse(loadText('files/expected.json')) as Record<string, Expected>;
const tables = Object.entries(all).filter(([, { expected }]) => expected);
/** Plain arrays and text without a header name no columns. */
const unnamed = [
  'no_header.csv',
  'fortran_D.txt',
  'fortran_forms.txt',
  'c_order_f8.npy',
  'fortran_order_f8.npy',
  'big_endian_f8.npy',
  'float32.npy',
  'compressed.npz',
];

describe('one table in many ways of writing it', () => {
  it.each(tables)('%s: rows, names, sums, first and last row are as written', (name, { expected }) => {
    const { bytes } = load(`files/${name}`);
    const table = parseMeasurement(bytes, name);
    if (!expected) throw new Error('chosen by having expectations');
    expect(table.rows).toBe(expected.n_rows);
    const names = unnamed.includes(name)
      ? ['column 1', 'column 2', 'column 3', 'column 4']
      : expected.columns;
    expect(table.columns.map((column) => column.name)).toEqual(names);
    expected.columns.forEach((column, j) => {
      const finite = table.data[j].filter(Number.isFinite);
      const sum = finite.reduce((a, b) => a + b, 0);
      const reference = expected.column_sums_of_finite[column];
      // References are printed with twelve digits: half a unit of the last is at most 5e-12 of the number.
      expect(Math.abs(sum - reference)).toBeLessThanOrEqual(5e-12 * Math.abs(reference));
      expect(table.rows - finite.length).toBe(expected.non_finite[column]);
      expect(table.data[j][0]).toBe(expected.first_row[j]);
      expect(table.data[j][table.rows - 1]).toBe(expected.last_row[j]);
    });
  });

  it('reads the plain ones without a finding', () => {
    for (const [name, { verdict }] of tables) {
      if (verdict !== 'accept') continue;
      expect([name, parseMeasurement(load(`files/${name}`).bytes, name).findings]).toEqual([name, []]);
    }
  });

  it('says that a decimal comma was read as one', () => {
    const { findings } = parseMeasurement(load('files/semicolon_decimal_comma.csv').bytes, 'a.csv');
    expect(placesOf(findings, 'warning')).toEqual([['decimal-comma']]);
  });

  it('names line and column of every cell that is not finite', () => {
    const { findings } = parseMeasurement(load('files/nan_inf.csv').bytes, 'a.csv');
    expect(placesOf(findings, 'error')).toEqual([
      ['not-finite', 4, 3],
      ['not-finite', 6, 3],
      ['not-finite', 8, 3],
      ['not-finite', 10, 3],
      ['not-a-number', 14, 3],
      ['empty-cell', 12, 4],
      ['not-finite', 16, 4],
    ]);
    expect(findings.every(({ remedy }) => remedy?.startsWith('Write'))).toBe(true);
  });

  it('names the lines of short rows', () => {
    const { findings } = parseMeasurement(load('files/ragged_short_rows.csv').bytes, 'a.csv');
    expect(placesOf(findings, 'error')).toEqual([
      ['ragged-row', 7],
      ['ragged-row', 21],
    ]);
  });

  it('tells two columns of one name apart', () => {
    const table = parseMeasurement(load('files/duplicate_headers.csv').bytes, 'a.csv');
    expect(table.columns.map(({ name }) => name)).toEqual(['k (column 1)', 'k (column 2)', 'S', 'sigma_S']);
    expect(placesOf(table.findings, 'warning')).toEqual([['duplicate-header', 1, 2]]);
    const error = errorOf(() =>
      parseMeasurement(load('files/duplicate_headers.csv').bytes, 'a.csv', {
        columns: { kLong: 'k', S: 'S' },
      }),
    );
    expect([error.code, error.column]).toEqual(['ambiguous-column', 1]);
  });

  it('says that bytes outside UTF-8 were read in another encoding', () => {
    const { findings } = parseMeasurement(load('files/latin1.csv').bytes, 'latin1.csv');
    expect(placesOf(findings, 'note')).toEqual([['not-utf8']]);
  });
});

describe('units', () => {
  it.each(['basic.ecsv', 'comma.ecsv'])('of %s come from its header', (name) => {
    const table = parseMeasurement(load(`files/${name}`).bytes, name);
    expect(table.columns.map(({ unit }) => unit)).toEqual(['1 / Mpc', '1 / Mpc', undefined, undefined]);
    expect([table.headerLine, table.lines[0]]).toEqual([name === 'basic.ecsv' ? 11 : 12, table.lines[0]]);
  });

  it('of a FITS table come from TUNIT', () => {
    const table = parseMeasurement(load('files/table.fits').bytes, 'table.fits');
    expect(table.columns.map(({ unit }) => unit)).toEqual([
      'Mpc-1',
      'Mpc-1',
      undefined,
      undefined,
      undefined,
    ]);
  });
});

describe('covariances on file', () => {
  it('accepts the symmetric one, with its determinant', () => {
    const matrix = parseMatrix(load('files/cov_ok.txt').bytes, 'cov_ok.txt', { part: 'covariance' });
    const check = checkCovariance(matrix, 40);
    // Derived by us with numpy 1.24.2: slogdet and cond.
    expect(check.logDeterminant).toBeCloseTo(194.247003172, 9);
    expect(check.condition).toBeCloseTo(7.346901234818931, 9);
    expect(placesOf(check.findings, 'error')).toEqual([]);
  });

  it('refuses the asymmetric one with row and column', () => {
    const matrix = parseMatrix(load('files/cov_asymmetric.txt').bytes, 'a.txt', { part: 'covariance' });
    const check = checkCovariance(matrix, 40);
    expect(check.covariance).toBeNull();
    expect(placesOf(check.findings, 'error')).toEqual([['covariance-asymmetric', 4, 8]]);
  });
});
