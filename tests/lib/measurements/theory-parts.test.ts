import { describe, expect, it } from 'vitest';
import { preflight, type PreflightResult } from '@/lib/measurements';
import { readTheory, cutTheory, writeTheory } from '@/lib/services/stored-theory';
import { columnNameFault } from '@/lib/templates';

const file = (name: string, lines: string[]) => ({ name, bytes: new TextEncoder().encode(lines.join('\n')) });

/** Three bins, the last first: rows of every other file come in this order too. */
const points = file('points.csv', [
  'kappa_lo,kappa_hi,S,sigma_S',
  '0.3,0.4,3,0.3',
  '0.1,0.2,1,0.1',
  '0.2,0.3,2,0.2',
]);

type Extra = Partial<Record<'window' | 'columns' | 'theoryCovariance', ReturnType<typeof file>>>;
const check = (extra: Extra): PreflightResult =>
  preflight({ file: points, columnFault: columnNameFault, ...extra });

function theoryOf(extra: Extra) {
  const result = check(extra);
  if (!result.ok) throw new Error(JSON.stringify(result.checks[0]));
  return { theory: result.theory, codes: result.checks.map(({ code }) => code), checks: result.checks };
}

const errorOf = (extra: Extra) => {
  const result = check(extra);
  expect(result.ok).toBe(false);
  return result.checks[0];
};

describe('a window', () => {
  const rows = ['0 0 0.5 0.5', '0.5 0.5 0 0', '0 0.5 0.5 0'];
  const edges = ['0.05 0.15 0.25 0.35', '0.15 0.25 0.35 0.45'];

  it('has edges in two rows, then a row a bin in the order of the file; it is kept in ascending κ', () => {
    const { theory, codes } = theoryOf({ window: file('w.txt', [...edges, ...rows]) });
    expect(theory.window).toMatchObject({
      size: 4,
      lo: Float64Array.of(0.05, 0.15, 0.25, 0.35),
      hi: Float64Array.of(0.15, 0.25, 0.35, 0.45),
      matrix: Float64Array.of(0.5, 0.5, 0, 0, 0, 0.5, 0.5, 0, 0, 0, 0.5, 0.5),
    });
    expect(codes).toContain('window-ok');
    expect(codes).toContain('window-condition-ok');
  });

  it('has points in one row, or nothing where it is square in the measurement’s own bins', () => {
    const { theory } = theoryOf({ window: file('w.txt', ['0.1 0.2 0.3 0.4', ...rows]) });
    expect(theory.window).toMatchObject({ lo: null, hi: null, kappa: Float64Array.of(0.1, 0.2, 0.3, 0.4) });
    // Row and column of each bin come in the order of the file: last, first, middle.
    const own = theoryOf({ window: file('w.txt', ['9 7 8', '3 1 2', '6 4 5']) });
    expect(own.theory.window).toMatchObject({
      matrix: Float64Array.of(1, 2, 3, 4, 5, 6, 7, 8, 9),
      lo: Float64Array.of(0.1, 0.2, 0.3),
    });
    expect(own.codes).toContain('window-row-sums');
    expect(own.codes).toContain('window-ill-conditioned');
  });

  it('is refused with place and remedy where it can’t be one', () => {
    expect(errorOf({ window: file('w.txt', rows.slice(1)) })).toMatchObject({
      code: 'window-size',
      part: 'window',
      message: expect.stringContaining('so 5 rows are due') as string,
    });
    const reversed = [edges[1], edges[0], ...rows];
    expect(errorOf({ window: file('w.txt', reversed) })).toMatchObject({
      code: 'window-bins',
      line: 2,
      column: 1,
    });
    const overlapping = ['0.05 0.12 0.25 0.35', edges[1], ...rows];
    expect(errorOf({ window: file('w.txt', overlapping) })).toMatchObject({ code: 'window-bins', column: 2 });
    const empty = [...edges, rows[0], '0 0 0 0', rows[2]];
    expect(errorOf({ window: file('w.txt', empty) })).toMatchObject({ code: 'window-empty-row', line: 4 });
    expect(errorOf({ window: file('w.txt', [...edges, rows[0], '1 x 0 0', rows[2]]) })).toMatchObject({
      code: 'not-a-number',
      part: 'window',
      line: 4,
      column: 2,
    });
  });
});

describe('columns', () => {
  it('are named tables in the order of the file, one column is enough, κ beside them is compared', () => {
    const { theory, codes } = theoryOf({ columns: file('c.csv', ['gravity', '30', '10', '20']) });
    expect(theory.columns).toEqual([{ name: 'gravity', values: Float64Array.of(10, 20, 30) }]);
    expect(codes).toContain('columns-ok');
    const with3 = file('c.csv', [
      'kappa_lo,kappa_hi,gravity,sky',
      '0.3,0.4,30,1',
      '0.1,0.2,10,1',
      '0.2,0.3,20,0',
    ]);
    expect(theoryOf({ columns: with3 }).theory.columns.map(({ name }) => name)).toEqual(['gravity', 'sky']);
    const moved = file('c.csv', ['kappa_lo,kappa_hi,gravity', '0.1,0.2,10', '0.2,0.3,20', '0.3,0.4,30']);
    expect(errorOf({ columns: moved })).toMatchObject({ code: 'columns-kappa', part: 'columns' });
  });

  it('of a bispectrum are in its units, and become those of S with the data', () => {
    const bispectrum = file('b.csv', [
      'k_long [1/Mpc],k_short [1/Mpc],B [Mpc^6],sigma_B [Mpc^6]',
      '0.02,0.1,4e9,1e9',
      '0.01,0.1,9e9,1e9',
    ]);
    const result = preflight({
      file: bispectrum,
      spectrum: { amplitude: 2.1e-9, tilt: 0.965, pivot: 0.05, pivotUnit: '1/Mpc' },
      columns: file('c.csv', ['gravity', '8e9', '9e9']),
      theoryCovariance: file('t.txt', ['1.6e19 0', '0 0']),
      columnFault: columnNameFault,
    });
    if (!result.ok) throw new Error(JSON.stringify(result.checks[0]));
    const { S } = result.measurement;
    expect(result.theory.columns[0].values[0]).toBeCloseTo(S[0], 12);
    expect(result.theory.columns[0].values[1] / S[1]).toBeCloseTo(2, 12);
    expect((result.theory.covariance?.[3] ?? NaN) / S[1] ** 2).toBeCloseTo(1, 12);
  });

  it.each([
    [['mu1', '1', '2', '3'], 'column-name'],
    [['log_prior', '1', '2', '3'], 'column-name'],
    [['1', '2', '3'], 'column-name'],
    [['gravity', '0', '0', '0'], 'column-empty'],
    [['gravity', '1', '2'], 'columns-size'],
    [['gravity', '1', 'x', '2'], 'not-a-number'],
    [['kappa_lo,kappa_hi', '0.3,0.4', '0.1,0.2', '0.2,0.3'], 'columns-size'],
    [['gravity,gravity', '1,2', '1,2', '2,2'], 'column-name'],
  ])('%j are refused: %s', (lines, code) => {
    expect(errorOf({ columns: file('c.csv', lines) })).toMatchObject({ code, part: 'columns' });
  });
});

describe('a theory covariance', () => {
  it('may be of one mode, which has no inverse, and comes in the order of the file', () => {
    const mode = [3, 1, 2];
    const lines = mode.map((a) => mode.map((b) => a * b * 0.01).join(' '));
    const { theory, checks } = theoryOf({ theoryCovariance: file('t.txt', lines) });
    expect(theory.covariance?.map((value) => Math.round(value * 100))).toEqual(
      Float64Array.of(1, 2, 3, 2, 4, 6, 3, 6, 9),
    );
    expect(checks.find(({ code }) => code === 'theory-covariance-ok')?.message).toContain('at most 1.00');
  });

  it.each([
    [['1 2 0', '2 1 0', '0 0 1'], 'theory-covariance-negative'],
    [['1 0 0', '0.5 1 0', '0 0 1'], 'theory-covariance-asymmetric'],
    [['1 0', '0 1'], 'theory-covariance-size'],
  ])('%j is refused: %s', (lines, code) => {
    expect(errorOf({ theoryCovariance: file('t.txt', lines) })).toMatchObject({
      code,
      part: 'theoryCovariance',
    });
  });
});

describe('what is stored of them', () => {
  const { theory } = theoryOf({
    window: file('w.txt', ['0.05 0.15 0.25 0.35', '0.15 0.25 0.35 0.45', '0 0 1 1', '1 1 0 0', '0 1 1 0']),
    columns: file('c.csv', ['gravity,sky', '30,3', '10,1', '20,2']),
    theoryCovariance: file('t.txt', ['9 3 6', '3 1 2', '6 2 4']),
  });

  it('comes back in every bit, and nothing is stored of nothing', () => {
    expect(readTheory(writeTheory(theory), 3)).toEqual(theory);
    expect(writeTheory({ window: null, columns: [], covariance: null })).toBeNull();
    expect(() => readTheory(writeTheory(theory), 4)).toThrow();
  });

  it('is cut by rows; a window keeps its theory bins', () => {
    const cut = cutTheory(theory, 3, [0, 2]);
    expect(cut.window?.matrix).toEqual(Float64Array.of(1, 1, 0, 0, 0, 0, 1, 1));
    expect(cut.window?.lo).toEqual(theory.window?.lo);
    expect(cut.columns[0]).toEqual({ name: 'gravity', values: Float64Array.of(10, 30) });
    expect(cut.covariance).toEqual(Float64Array.of(1, 3, 3, 9));
  });
});
