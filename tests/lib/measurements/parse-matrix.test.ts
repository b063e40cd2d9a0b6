import { describe, expect, it } from 'vitest';
import { parseMatrix } from '@/lib/measurements';
import { errorOf, file, placesOf } from './measurement-files';

const parse = (text: string, part: 'covariance' | 'mocks' = 'mocks') =>
  parseMatrix(file(text).bytes, 'm.csv', { part });

/** A linear congruential generator (Numerical Recipes' constants), numbers in [0, 1). */
function generator(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
}

describe('a matrix of numbers', () => {
  it.each([
    ['1,2\n3,4\n', []],
    ['1;2\r\n3;4', []],
    ['1\t2\r3\t4\r', []],
    ['  1   2 \n\n# note\n 3\t 4 # end\n', []],
    ['\ufeff1,2\n3,4\n', []],
    ['1, 2,\n3, 4,\n', []],
    ['"1","2"\n"3","4"\n', []],
    ['1.D0 .2D+01\n3.0000000000000000000d0 400.0000000000000000000D-02\n', []],
    ['a,b\n1,2\n3,4\n', ['matrix-header']],
    ['1,0;2,0\n3,0;4,0\n', ['decimal-comma']],
  ])('%j is read by rows', (text, codes) => {
    const matrix = parse(text);
    expect([matrix.rows, matrix.columns, ...matrix.data]).toEqual([2, 2, 1, 2, 3, 4]);
    expect(matrix.findings.map(({ code }) => code)).toEqual(codes);
  });

  it('leaves out a first row that counts the columns', () => {
    const matrix = parse('0,1,2,3\n.1,.2,.3,.4\n');
    expect(Array.from(matrix.data)).toEqual([0.1, 0.2, 0.3, 0.4]);
    expect(placesOf(matrix.findings, 'note')).toEqual([['matrix-header', 1]]);
  });

  it('reads every number to the last bit', () => {
    const random = generator(1);
    const cells = Array.from({ length: 30_000 }, () => {
      const value = (random() - 0.5) * 10 ** Math.floor(random() * 60 - 30);
      const kind = Math.floor(random() * 4);
      if (kind === 0) return String(value);
      if (kind === 1) return value.toExponential(Math.floor(random() * 18));
      if (kind === 2) return value.toPrecision(1 + Math.floor(random() * 17));
      return `${Math.floor(random() * 1e9)}.${Math.floor(random() * 1e6)}E${Math.floor(random() * 80 - 40)}`;
    });
    const rows = Array.from({ length: 300 }, (_, i) => cells.slice(100 * i, 100 * i + 100).join(' '));
    const { data, findings } = parse(rows.join('\n'));
    expect(findings).toEqual([]);
    expect(Array.from(data)).toEqual(cells.map(Number));
  });

  it.each([
    ['1,2\n3,x\n', ['not-a-number', 2, 2]],
    ['1,2\n3 5,4\n', ['not-a-number', 2, 1]],
    ['1,2\n,4\n', ['empty-cell', 2, 1]],
    ['1,2\n3,NaN\n', ['not-finite', 2, 2]],
    ['1,2\n3,1e400\n', ['not-finite', 2, 2]],
    ['1,2\n3\n', ['ragged-row', 2]],
    ['1,2\n3,4,5\n', ['ragged-row', 2]],
    ['0.5 2\n1,5 2\n', ['mixed-decimals', 1, 1]],
  ])('%j has its fault named by line and column', (text, place) => {
    const { findings, data } = parse(text);
    expect(placesOf(findings, 'error')).toEqual([place]);
    expect(findings[0].part).toBe('mocks');
    expect(findings[0].remedy).not.toBe('');
    expect(data).toHaveLength(4);
  });

  it.each([
    ['', 'empty-file'],
    ['# nothing\n', 'empty-file'],
    ['a,b\n', 'no-rows'],
    ['kappa,S\n0.1,2\n', 'looks-like-table'],
    ['"1,2\n', 'unclosed-quote'],
    [`${'1'.repeat(9 * 1024 * 1024)}\n`, 'line-too-long'],
  ])('%.20j is refused as %s', (text, code) => {
    const error = errorOf(() => parse(text, 'covariance'));
    expect([error.code, error.part]).toEqual([code, 'covariance']);
  });

  it('of 30 MB is read within seconds', () => {
    const random = generator(2);
    const rows = Array.from({ length: 200 }, () =>
      Array.from({ length: 100 }, () => (random() - 0.5).toPrecision(12)).join(','),
    );
    const block = `${rows.join('\n')}\n`;
    const { bytes } = file(block.repeat(Math.ceil(30e6 / block.length)));
    expect(bytes.length).toBeGreaterThanOrEqual(30e6);
    const start = performance.now();
    const matrix = parseMatrix(bytes, 'mocks.csv', { part: 'mocks' });
    const seconds = (performance.now() - start) / 1000;
    expect([matrix.columns, matrix.findings.length]).toEqual([100, 0]);
    // A few tenths of a second on a free core; the bound leaves room for a machine that does other things.
    expect(seconds).toBeLessThan(6);
  });
});
