import { describe, expect, it } from 'vitest';
import { parseMeasurement } from '@/lib/measurements';
import { errorOf, file, placesOf } from './measurement-files';

const parse = (text: string, options = {}) => parseMeasurement(file(text).bytes, 'data.csv', options);
const names = (text: string) => parse(text).columns;

describe('names and units', () => {
  it('takes both from a comment before the data', () => {
    expect(names('# k_long [h/Mpc]  k_short [h/Mpc]  S  sigma_S\n1e-3 0.1 2 3\n2e-3 0.1 2 3\n')).toEqual([
      { name: 'k_long', unit: 'h/Mpc' },
      { name: 'k_short', unit: 'h/Mpc' },
      { name: 'S' },
      { name: 'sigma_S' },
    ]);
  });

  it.each([
    ['k_long (h/Mpc),k_short (h/Mpc),S\n1,2,3\n', ['k_long', 'k_short', 'S']],
    ['"k_long","k_short","S, mean"\n1,2,3\n', ['k_long', 'k_short', 'S, mean']],
    ['# 1:k_long 2:k_short 3:S\n1 2 3\n', ['k_long', 'k_short', 'S']],
    ['#kappa,S\n1,2\n', ['kappa', 'S']],
    ['kappa;S(kappa);\n1;2;\n3;4;\n', ['kappa', 'S(kappa)']],
    ['kappa [1] S [1]\n0.1 2\n0.2 3\n', ['kappa', 'S']],
    ['"a ""b""" S\n0.1 2\n', ['a "b"', 'S']],
  ])('%j has its columns', (text, expected) => {
    const table = parse(text);
    expect(table.columns.map(({ name }) => name)).toEqual(expected);
    expect(table.findings).toEqual([]);
  });

  it('does not take a sentence of the right length for names when a later comment has them', () => {
    expect(names('# three plain words\n# kappa S sigma\n0.1 2 3\n').map(({ name }) => name)).toEqual([
      'kappa',
      'S',
      'sigma',
    ]);
  });

  it('does not eat a first row with a bad cell as a header', () => {
    const table = parse('0.1,2,oops\n0.2,3,4\n');
    expect(table.rows).toBe(2);
    expect(placesOf(table.findings, 'error')).toEqual([['not-a-number', 1, 3]]);
  });
});

describe('lines and cells', () => {
  it.each(['\n', '\r\n', '\r'])('reads line ends %j, with line numbers', (end) => {
    const table = parse(['kappa,S', '', '0.1,1', '# note', '0.2,2', ''].join(end));
    expect(Array.from(table.lines)).toEqual([3, 5]);
    expect(table.data.map((column) => Array.from(column))).toEqual([
      [0.1, 0.2],
      [1, 2],
    ]);
  });

  it.each([
    ['1.5D-03', 1.5e-3],
    ['1.0-103', 1e-103],
    ['.5d0', 0.5],
    ['5.', 5],
    ['−2', -2],
    ['"3"', 3],
    ['+4e2', 400],
  ])('reads %s as the number it is', (cell, value) => {
    expect(parse(`kappa,S\n0.1,${cell}\n`).data[1][0]).toBe(value);
  });

  it.each([
    ['0x10', 'not-a-number'],
    ['1_000', 'not-a-number'],
    ['n/a', 'not-a-number'],
    ['1e999', 'not-finite'],
    ['-inf', 'not-finite'],
    ['', 'empty-cell'],
    ['1 2', 'not-a-number'],
  ])('reports the cell %j as %s with line and column', (cell, code) => {
    const table = parse(`kappa,S,sigma\n0.1,1,1\n0.2,${cell},1\n`);
    expect(placesOf(table.findings, 'error')).toEqual([[code, 3, 2]]);
    expect(table.data[1][1]).toBeNaN();
  });

  it('refuses a file that has decimal points and decimal commas', () => {
    expect(placesOf(parse('kappa;S\n0,1;1,5\n0,2;1.500\n').findings, 'error')).toEqual([
      ['mixed-decimals', 2, 1],
      ['mixed-decimals', 3, 1],
      ['mixed-decimals', 2, 2],
    ]);
    const late = `kappa;S\n${'0,1;1,5\n'.repeat(70)}0,1;1.5\n`;
    expect(placesOf(parse(late).findings, 'error')).toEqual([['mixed-decimals', 72, 2]]);
  });

  it('lists the first twenty of a kind and counts the rest', () => {
    const rows = Array.from({ length: 61 }, (_, i) => `0.${i + 100},x${i},1`).join('\n');
    const errors = parse(`kappa,S,sigma\n${rows}\n0.9,1,1\n`).findings;
    expect(errors).toHaveLength(21);
    expect(errors[20].code).toBe('more-findings');
    expect(errors[20].message).toContain('41 more');
  });

  it('keeps cells out of the messages where values are withheld', () => {
    const [found] = parse('kappa,S\n0.1,1\n0.2,77x\n', { withoutValues: true }).findings;
    expect(found.message).not.toContain('77');
  });

  it('takes a column of words as such', () => {
    const { findings } = parse('label,kappa,S\na,0.1,1\nb,0.2,2\n');
    expect(placesOf(findings, 'warning')).toEqual([['text-column', 2, 1]]);
    expect(placesOf(findings, 'error')).toEqual([]);
  });

  it('shows no control or direction characters of a cell', () => {
    const [found] = parse('kappa,S\n0.1,1\n0.2,a\u202eb\u0085c\n').findings;
    expect(found.message).toContain('“a·b·c”');
  });
});

describe('what is no measurement', () => {
  const bytes = (text: string) => Uint8Array.from(text, (sign) => sign.charCodeAt(0));

  it.each([
    ['', 'empty-file'],
    ['\n  \n# only a comment\n', 'empty-file'],
    ['kappa,S\n', 'no-rows'],
    ['kappa\n0.1\n0.2\n', 'single-column'],
    ['kappa,S\n0.1,1\0\n', 'not-text'],
    ['kappa,S\n0.1,\u00072\n', 'not-text'],
    ['\xff\xfek\0a\0', 'wrong-encoding'],
    ['k\0a\0p\0p\0a\0,\0S\0\n\0', 'wrong-encoding'],
    ['\x1f\x8b\x08\0', 'damaged-file'],
    ['%PDF-1.7\n', 'format-not-read'],
    ['<!DOCTYPE html><html>', 'format-not-read'],
    ['<?xml version="1.0"?>', 'format-not-read'],
    ['{"S": [1, 2]}', 'format-not-read'],
    ['PK\x03\x04....[Content_Types].xml', 'format-not-read'],
    ['\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1', 'format-not-read'],
    ['\x89HDF\r\n\x1a\n', 'format-not-read'],
    ['kappa,S\n0.1,"2\n', 'unclosed-quote'],
  ])('%j is refused as %s, with a remedy', (text, code) => {
    const error = errorOf(() => parseMeasurement(bytes(text), 'data.csv'));
    expect(error.code).toBe(code);
    expect(error.remedy).not.toBe('');
    expect(error.toFinding()).toMatchObject({ code, level: 'error', part: 'file', remedy: error.remedy });
  });

  it('names the line of a zero byte and of an open quote', () => {
    expect(errorOf(() => parseMeasurement(bytes('a,b\r\n1,2\r\n1,\0\r\n'), 'x')).line).toBe(3);
    expect(errorOf(() => parseMeasurement(bytes('a,b\n1,2\n1,"2\n'), 'x')).line).toBe(3);
  });

  it('bounds size, length of lines and number of columns', () => {
    expect(errorOf(() => parse('kappa,S\n0.1,2\n', { maxBytes: 8 })).code).toBe('file-too-large');
    expect(errorOf(() => parse(`kappa,S\n0.1,${'2'.repeat(1_000_001)}\n`)).code).toBe('line-too-long');
    expect(errorOf(() => parse(`${'1,'.repeat(1500)}1\n`)).code).toBe('too-many-columns');
  });

  it('requires the columns that a mapping names', () => {
    const error = errorOf(() => parse('kappa,S\n0.1,2\n', { columns: { kappa: 'x', S: 'S' } }));
    expect([error.code, error.message]).toEqual([
      'unknown-column',
      'κ is mapped to x, which the file lacks: it has kappa, S.',
    ]);
  });
});

it('reads a table of 200,000 rows in time proportional to its size', () => {
  const row = '1.2345678e-02,3.4567891e-02,5.6789123e+00,1.2345678e-01\n';
  const time = (rows: number) => {
    const { bytes } = file(`k_long,k_short,S,sigma_S\n${row.repeat(rows)}`);
    const start = performance.now();
    expect(parseMeasurement(bytes, 'big.csv').rows).toBe(rows);
    return performance.now() - start;
  };
  time(20_000);
  expect(time(200_000)).toBeLessThan(8_000);
});
