import { describe, expect, it } from 'vitest';
import { curveOf, OverlayError, placedWords, samplesOf } from '@/components/fit/overlay';
import { tableOf } from '@/components/fit/overlay-table';

const table = (text: string) => tableOf(new TextEncoder().encode(text), 'given.ecsv');
const words = (act: () => unknown): string => {
  try {
    act();
  } catch (error) {
    if (error instanceof OverlayError) return error.message;
    throw error;
  }
  return '';
};

describe('a curve from elsewhere', () => {
  it('is taken by name among other columns, in ascending κ', () => {
    const { kappa, y } = curveOf(table('n,S,kappa\n1,0.3,0.2\n2,-0.1,0.01\n'));
    expect([...kappa]).toEqual([0.01, 0.2]);
    expect([...y]).toEqual([-0.1, 0.3]);
  });

  it('is taken from two columns without names', () => {
    expect([...curveOf(table('0.01 2\n0.1 3\n')).y]).toEqual([2, 3]);
  });

  it.each([
    ['kappa,S\n0.01,1\n0.02,x\n', /^Line 3, column 2: .*S.* is not a number/],
    ['kappa,S\n0.01,1\n0,2\n', /^Line 3, column 1: κ is 0; a ratio of wavenumbers is above 0\.$/],
    ['a,b,c\n1,2,3\n', /^The file has 3 columns, none of them named kappa and S\./],
  ])('is refused with the place: %j', (text, message) => {
    expect(words(() => curveOf(table(text)))).toMatch(message);
  });

  it('isn’t refused for a fault in a column that it doesn’t use', () => {
    expect([...curveOf(table('kappa,S,note\n0.01,1,5\n0.02,2,x\n')).y]).toEqual([1, 2]);
  });
});

describe('samples from elsewhere', () => {
  const rows = Array.from({ length: 150 }, (_, i) => `${i < 20 ? 1 : 0},${i},${-i}`).join('\n');
  const file = `warmup,mu1,other\n${rows}\n`;

  it('are matched by name, without warm-up', () => {
    const [g, mu1] = samplesOf(table(file), ['g', 'mu1']);
    expect(g).toBeNull();
    expect(mu1).toHaveLength(130);
    expect(mu1?.[0]).toBe(20);
  });

  it('are read from a sample file with a header in comments', () => {
    const head = '# %ECSV 1.0\n# ---\n# datatype:\n# - {name: mu1, datatype: float64}\n';
    const text = `${head}mu1,g\n${Array.from({ length: 100 }, (_, i) => `${i},1`).join('\n')}\n`;
    expect(samplesOf(table(text), ['mu1'])[0]).toHaveLength(100);
  });

  it('are refused where no name fits, too few are left, or a cell is no number, with the place', () => {
    expect(words(() => samplesOf(table(file), ['g']))).toBe(
      'No column has the name of a parameter shown here (g). The file has warmup, mu1, other.',
    );
    expect(words(() => samplesOf(table('mu1,g\n1,2\n2,3\n'), ['mu1']))).toMatch(/^The file has 2 samples/);
    expect(words(() => samplesOf(table(file.replace('0,77,', '0,x,')), ['mu1']))).toMatch(
      /^Line 79, column 2: /,
    );
  });
});

describe('the place of a fault in words', () => {
  it('names line and column where they are known', () => {
    expect(placedWords({ message: 'No.', line: 7, column: 2 })).toBe('Line 7, column 2: No.');
    expect(placedWords({ message: 'No.', line: 7 })).toBe('Line 7: No.');
    expect(placedWords({ message: 'No.' })).toBe('No.');
  });
});
