import { describe, expect, it } from 'vitest';
import { parseMeasurement, preflight, type PreflightInput, type PreflightPassed } from '@/lib/measurements';
import { file, load, loadText, placesOf, withLine } from './measurement-files';

const one = loadText('one-field.csv');
const mocks = loadText('one-field-mocks.csv');
const mockRows = mocks.trim().split('\n');

function passed(input: PreflightInput): PreflightPassed {
  const result = preflight(input);
  if (!result.ok) throw new Error(result.checks.map(({ message }) => message).join('\n'));
  return result;
}

const errors = (input: PreflightInput) => {
  const result = preflight(input);
  expect(result.ok).toBe(false);
  const found = result.checks.filter(({ level }) => level === 'error');
  expect(found.every(({ remedy }) => remedy)).toBe(true);
  return placesOf(result.checks, 'error');
};

describe('a measurement with its mocks', () => {
  it.each([
    ['one-field.csv', 'one-field-mocks.csv', 36, 0.004, 0.3, true, 400],
    ['two-field.csv', 'two-field-mocks.csv', 40, 0.003, 0.3, true, 600],
    ['null.dat', 'null-mocks.csv', 30, 1.1527627177e-3 / 0.18, 5.0591504308e-2 / 0.18, false, 300],
  ])(
    '%s passes: rows, range, edges, mocks',
    (name, mockName, rows, kappaMin, kappaMax, hasBinEdges, mockCount) => {
      const result = passed({ file: load(name), mocks: load(mockName) });
      expect(result.summary).toMatchObject({ rows, kappaMin, kappaMax, hasBinEdges });
      expect(result).toMatchObject({ mockCount, covarianceSource: 'mocks' });
      const factor = ((mockCount - rows - 2) / (mockCount - 1)).toFixed(3);
      const messages = result.checks.filter(({ level }) => level === 'ok').map(({ message }) => message);
      expect(messages).toContain(`Mocks against bins: ${mockCount} for ${rows}, factor ${factor}.`);
      expect(messages).toContain('Covariance symmetric and positive definite.');
      expect(messages.includes('Bin edges given, in order, without overlap.')).toBe(hasBinEdges);
      expect(result.checks.filter(({ level }) => level !== 'ok')).toEqual([]);
    },
  );

  it('gives the resolution 2π/L and the Nyquist mass π/Δ of its bins', () => {
    const { summary } = passed({ file: load('two-field.csv'), mocks: load('two-field-mocks.csv') });
    const L = Math.log(0.3 / 0.003);
    expect(summary.resolution).toBeCloseTo((2 * Math.PI) / L, 12);
    expect(summary.nyquist).toBeCloseTo((Math.PI * 40) / L, 6);
  });

  it('has the sample covariance and the mean of the mocks', () => {
    // Derived by us with numpy 1.24.2: cov(mocks.T), mean.
    const { covariance, mockMean } = passed({
      file: load('one-field.csv'),
      mocks: load('one-field-mocks.csv'),
    });
    expect(covariance[0] / 6.537933510412538e-5).toBeCloseTo(1, 12);
    expect(covariance[3 * 36 + 5] / 1.7087437253268523e-5).toBeCloseTo(1, 12);
    expect(covariance[5 * 36 + 3]).toBe(covariance[3 * 36 + 5]);
    expect(mockMean?.[0]).toBeCloseTo(-0.08078229952400001, 14);
  });

  it('is the same whatever the order of its rows, mocks permuted with them', () => {
    const [comment, header, ...rows] = one.trim().split('\n');
    const turned = [comment, header, ...rows.toReversed()].join('\n');
    const turnedMocks = mockRows.map((row) => row.split(',').toReversed().join(',')).join('\n');
    const straight = passed({ file: load('one-field.csv'), mocks: load('one-field-mocks.csv') });
    const result = passed({ file: file(turned), mocks: file(turnedMocks) });
    expect(result.measurement.S).toEqual(straight.measurement.S);
    expect(result.mockMean).toEqual(straight.mockMean);
    result.covariance.forEach((value, k) => expect(value / straight.covariance[k]).toBeCloseTo(1, 10));
    expect(placesOf(result.checks, 'note')).toEqual([['rows-reordered', 3]]);
  });

  it('takes 1,200 mocks of 40 bins with factor 0.966', () => {
    const covariance = Array.from({ length: 40 }, (_, i) =>
      Array.from({ length: 40 }, (__, j) => (i === j ? 1 : 0)).join(' '),
    );
    const rows = Array.from({ length: 40 }, (_, i) => `${0.01 + i / 100},${Math.sin(i / 9)}`);
    const { checks, mockCount, covarianceSource } = passed({
      file: file(`kappa,S\n${rows.join('\n')}`),
      covariance: file(covariance.join('\n')),
      mockCount: 1200,
    });
    expect(checks.map(({ message }) => message)).toContain(
      'Mocks against bins: 1\u202f200 for 40, factor 0.966.',
    );
    expect([mockCount, covarianceSource]).toEqual([1200, 'file']);
  });
});

describe('a bad upload', () => {
  const good = load('one-field-mocks.csv');

  it('without a column names it and what there is', () => {
    const text = one.replace('kappa_eff,S,sigma_S', 'kappa_eff,shape_value,sigma_S');
    expect(errors({ file: file(text), mocks: good })).toEqual([['missing-column', 2]]);
  });

  it.each([
    ['NaN', 'not-finite'],
    ['n/a', 'not-a-number'],
    ['', 'empty-cell'],
    ['inf', 'not-finite'],
  ])('with %j for S names line and column', (cell, code) => {
    const text = withLine(one, 12, (old) => old.split(',').with(3, cell).join(','));
    expect(errors({ file: file(text), mocks: good })).toEqual([[code, 12, 4]]);
  });

  it('with reversed edges names the line', () => {
    const text = withLine(one, 9, (old) => {
      const [lo, hi, ...rest] = old.split(',');
      return [hi, lo, ...rest].join(',');
    });
    expect(errors({ file: file(text), mocks: good })).toContainEqual(['edges-reversed', 9, 2]);
  });

  it('with a covariance that is not positive definite names the leading minor and the smallest eigenvalue', () => {
    const input = { file: file('kappa,S\n0.1,1\n0.2,2\n0.3,1\n'), covariance: file('1 0 0\n0 1 2\n0 2 1\n') };
    expect(errors(input)).toEqual([['covariance-not-positive-definite', 3, 3]]);
    const [{ message }] = preflight(input).checks;
    expect(message).toContain('order 3');
    expect(message).toContain('smallest eigenvalue is −1');
  });

  it('with p + 4 mocks says how many are needed; p + 5 pass with a warning', () => {
    const few = (n: number) => ({ file: file(one), mocks: file(mockRows.slice(0, n).join('\n')) });
    expect(errors(few(40))).toEqual([['too-few-mocks']]);
    expect(preflight(few(40)).checks[0].message).toContain('at least 41 are needed');
    expect(placesOf(passed(few(41)).checks, 'warning')).toContainEqual(['few-mocks']);
  });

  it('with transposed mocks says so', () => {
    const table = mockRows.map((row) => row.split(','));
    const transposed = table[0].map((_, j) => table.map((row) => row[j]).join(',')).join('\n');
    expect(errors({ file: file(one), mocks: file(transposed) })).toEqual([['mocks-transposed']]);
  });

  it('with the wrong file in each place says which belongs there', () => {
    expect(errors({ file: load('one-field-mocks.csv'), mocks: good })).toEqual([['looks-like-matrix', 1]]);
    expect(errors({ file: file(one), mocks: file(one) })).toEqual([['looks-like-table', 2]]);
    expect(errors({ file: file(one), mocks: load('two-field-mocks.csv') })).toEqual([['mocks-size']]);
    expect(errors({ file: file(one), covariance: load('files/cov_ok.txt') })).toEqual([['covariance-size']]);
    expect(errors({ file: file('%PDF-1.7', 'a.pdf'), mocks: good })).toEqual([['format-not-read', 1]]);
  });

  it('with a mock that holds no number names its line and column', () => {
    const bad = mocks
      .split('\n')
      .with(6, mockRows[6].replace(/^[^,]*,[^,]*/, '1,nan'))
      .join('\n');
    expect(errors({ file: file(one), mocks: file(bad) })).toEqual([['not-finite', 7, 2]]);
  });

  it('with both a covariance and mocks, or with no errors at all, is refused', () => {
    const bare = one.replaceAll(/,[^,]*$/gm, '');
    expect(errors({ file: file(bare) })).toEqual([['no-errors']]);
    expect(errors({ file: file(one), mocks: good, covariance: load('files/cov_ok.txt') })).toEqual([
      ['covariance-and-mocks'],
    ]);
  });

  it('with a single row, or more rows than can be used, is refused', () => {
    expect(errors({ file: file('kappa,S,sigma\n0.1,1,1\n') })).toEqual([['too-few-rows', 2]]);
    const rows = Array.from({ length: 501 }, (_, i) => `${(i + 1) / 1e4},1,1`).join('\n');
    expect(errors({ file: file(`kappa,S,sigma\n${rows}\n`) })).toEqual([['too-many-bins', 502]]);
  });

  it('with a count of mocks that is none is refused', () => {
    const input = { file: file('kappa,S\n0.1,1\n0.2,2\n'), covariance: file('1 0\n0 1\n') };
    expect(errors({ ...input, mockCount: 2.5 })).toEqual([['mock-count']]);
    expect(errors({ ...input, mockCount: 6 })).toEqual([['too-few-mocks']]);
  });
});

describe('what is allowed with a warning', () => {
  it('standard errors alone, taken as uncorrelated', () => {
    const result = passed({ file: file(one) });
    expect(placesOf(result.checks, 'warning')).toEqual([['errors-only']]);
    expect(result.covarianceSource).toBe('errors');
    expect(result.covariance[37]).toBe(result.measurement.sigma![1] ** 2);
    expect(result.covariance[1]).toBe(0);
  });

  it('a bad cell in a column that is not used', () => {
    const text = 'kappa,S,sigma,n\n0.1,1,1,5\n0.2,1,1,many\n0.3,1,1,\n';
    const { checks } = passed({ file: file(text) });
    expect(placesOf(checks, 'note')).toEqual([
      ['not-a-number', 3, 4],
      ['empty-cell', 4, 4],
    ]);
  });

  it('a point far from its neighbours, by line, and without the distance where values are withheld', () => {
    const text = withLine(one, 15, (old) => old.split(',').with(3, '0.6').join(','));
    const open = passed({ file: file(text), mocks: load('one-field-mocks.csv') });
    expect(placesOf(open.checks, 'warning')).toEqual([['suspicious-point', 15]]);
    const blind = passed({ file: file(text), mocks: load('one-field-mocks.csv'), withoutValues: true });
    const message = blind.checks.find(({ code }) => code === 'suspicious-point')?.message;
    expect(message).toBe('One point lies more than 5 standard errors from its neighbours’ smooth trend.');
  });

  it('no cell is quoted where values are withheld, even of a table that was read before', () => {
    const text = withLine(one, 15, (old) => old.split(',').with(3, '0.77x').join(','));
    const { bytes } = file(text);
    const open = preflight({ file: parseMeasurement(bytes, 'a.csv') }).checks[0];
    expect(open.message).toBe('The value of S is not a number: “0.77x”.');
    for (const input of [{ bytes, name: 'a.csv' }, parseMeasurement(bytes, 'a.csv')]) {
      const [blind] = preflight({ file: input, withoutValues: true }).checks;
      expect(blind.message).toBe('The value of S is not a number.');
    }
  });

  it('errors that differ from the diagonal, and variances in their place', () => {
    const bins = 'kappa,S,sigma\n0.1,1,2\n0.2,1,3\n0.3,1,4\n';
    const differ = passed({ file: file(bins), covariance: file('4 0 0\n0 9 0\n0 0 25\n') });
    expect(placesOf(differ.checks, 'warning')).toEqual([['errors-differ']]);
    const variances = passed({ file: file(bins), covariance: file('2 0 0\n0 3 0\n0 0 4\n') });
    expect(variances.checks[0].message).toContain('variances');
  });
});
