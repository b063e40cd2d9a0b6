import { describe, expect, it } from 'vitest';
import { preflight, type PowerSpectrum, type PreflightInput, type PreflightPassed } from '@/lib/measurements';
import { bispectrumUnit } from '@/lib/measurements/units';
import { compileTemplate } from '@/lib/templates';
import { file, placesOf } from './measurement-files';

const spectrum: PowerSpectrum = { amplitude: 2.1e-9, tilt: 0.965, pivot: 0.05, pivotUnit: '1/Mpc' };

function passed(input: PreflightInput): PreflightPassed {
  const result = preflight(input);
  if (!result.ok) throw new Error(result.checks.map(({ message }) => message).join('\n'));
  return result;
}

const errors = (text: string, given: PowerSpectrum | null) =>
  placesOf(preflight({ file: file(text), spectrum: given }).checks, 'error').map((place) => String(place));

/** Rows in ascending κ: 2k3/(k1+k2) is 0.02, 0.0499 and 0.457. */
const triangles = (k: string, B: string) => `k1 [${k}],k2 [${k}],k3 [${k}],B [${B}],sigma_B
0.2,0.2,0.004,-3.1e-6,1e-6
0.15,0.2,0.08,2.5e-8,1e-9
0.203,0.198,0.01,5.7e-7,2e-7
`;

/*
 * S = (k1 k2 k3)² B/((2π)⁴ A_s² [(k1 k2 k3)/k_*³]^(2(n_s − 1)/3)) with A_s = 2.1e-9, n_s = 0.965, k_* = 0.05/Mpc, h = 0.7, evaluated
 * with 40 digits in mpmath 1.3 from the formula alone, in the order of κ.
 */
describe('a bispectrum becomes S', () => {
  it.each([
    ['1/Mpc', 'Mpc^6', spectrum, [-11.613019685027943, 13.768134844745383, 22.446473736330018]],
    // Scale-invariant: the pivot drops out.
    [
      '1/Mpc',
      'Mpc^6',
      { amplitude: 2.1e-9, tilt: 1 },
      [-11.54632017760415, 13.397977654307811, 20.950984193233337],
    ],
    [
      'h/Mpc',
      '(Mpc/h)^6',
      { ...spectrum, h: 0.7 },
      [-11.326664194013686, 13.428638217619147, 21.892985394568894],
    ],
    [
      'h/Mpc',
      'Mpc^6',
      { ...spectrum, h: 0.7 },
      [-1.3325707157615161, 1.5798658576646751, 2.5756878386856359],
    ],
    [
      '1/Mpc',
      'Mpc6 h-6',
      { ...spectrum, h: 0.7 },
      [-98.709038623600224, 117.02721523128444, 190.79187869280672],
    ],
  ])('of wavenumbers in %s and B in %s', (k, B, given, S) => {
    const { measurement, summary } = passed({ file: file(triangles(k, B)), spectrum: given });
    measurement.S.forEach((value, i) => expect(Math.abs(value / S[i] - 1)).toBeLessThan(1e-13));
    expect(summary.kappaMin).toBeCloseTo(0.02, 14);
    const [b, sigma] = [-3.1e-6, 1e-6];
    expect(measurement.sigma![0]).toBeCloseTo(Math.abs((S[0] * sigma) / b), 12);
  });

  it('in kpc as in Mpc', () => {
    const text = triangles('1/kpc', 'kpc^6').replace(/^[\d.,e+-]+$/gm, (row) => {
      const [k1, k2, k3, B, sigma] = row.split(',').map(Number);
      return [k1 / 1e3, k2 / 1e3, k3 / 1e3, B * 1e18, sigma * 1e18].join(',');
    });
    const { S } = passed({ file: file(text), spectrum }).measurement;
    expect(S[0] / -11.613019685027943).toBeCloseTo(1, 13);
  });

  it('and what a template predicts comes back from the B that it means, isosceles, edges beside', () => {
    const edges = Array.from({ length: 13 }, (_, i) => 0.01 * 1.3 ** i);
    const [lo, hi] = [edges.slice(0, -1), edges.slice(1)];
    const template = compileTemplate(
      'locked-squeezed',
      { fields: 1, vertex: 1, background: [1, 2] },
      {
        kind: 'bins',
        lo: Float64Array.from(lo),
        hi: Float64Array.from(hi),
        weightPower: 0,
      },
    );
    const values: Record<string, number> = { mu1: 2.3, g: 12, c1: 0.3, c2: -0.2 };
    const S = new Float64Array(lo.length);
    template.predict(
      Float64Array.from(template.parameters, ({ name }) => values[name]),
      S,
    );
    const short = 0.31;
    const rows = lo.map((low, i) => {
      const long = short * Math.sqrt(low * hi[i]);
      // By logarithms, another way than the program's: ln B = ln S + 4 ln 2π + 2 ln A + (2/3)(n − 1) ln(k1k2k3/k_*³) − 2 ln k1k2k3.
      const sides = 2 * Math.log(short) + Math.log(long);
      const tilted = (2 / 3) * (0.965 - 1) * (sides - 3 * Math.log(0.05));
      const lnB = 4 * Math.log(2 * Math.PI) + 2 * Math.log(2.1e-9) + tilted - 2 * sides;
      const B = S[i] * Math.exp(lnB);
      return [low, hi[i], long, short, B, 0.1 * Math.abs(B)].join(',');
    });
    const text = ['kappa_lo,kappa_hi,k_long [1/Mpc],k_short [1/Mpc],B [Mpc^6],B_err', ...rows].join('\n');
    const result = passed({ file: file(text), spectrum });
    expect(Object.keys(result.mapping).sort()).toEqual([
      'B',
      'kLong',
      'kShort',
      'kappaHi',
      'kappaLo',
      'sigma',
    ]);
    result.measurement.S.forEach((value, i) => expect(Math.abs(value / S[i] - 1)).toBeLessThan(1e-12));
    expect(result.spectrum).toEqual({
      ...{ amplitude: 2.1e-9, tilt: 0.965, pivot: 0.05, pivotUnit: '1/Mpc' },
      ...{ wavenumberUnit: '1/Mpc', bispectrumUnit: 'Mpc^6', h: null },
    });
  });
});

describe('covariance and mocks of B', () => {
  const text = triangles('1/Mpc', 'Mpc^6');
  const sigma = [1e-6, 1e-9, 2e-7];
  /** Rows of the file in ascending κ. */
  const order = [0, 2, 1];
  const factors = [-11.613019685027943 / -3.1e-6, 22.446473736330018 / 2.5e-8, 13.768134844745383 / 5.7e-7];

  it('take the factors of both their bins', () => {
    const matrix = sigma.map((a, i) => sigma.map((b, j) => a * b * (i === j ? 1 : 0.3)));
    const covariance = file(matrix.map((row) => row.join(' ')).join('\n'));
    const { covariance: C } = passed({ file: file(text), covariance, spectrum });
    order.forEach((i, a) =>
      order.forEach((j, b) =>
        expect(C[3 * a + b] / (matrix[i][j] * factors[i] * factors[j])).toBeCloseTo(1, 12),
      ),
    );
  });

  it('become the covariance of the mocks of S', () => {
    const rows = Array.from({ length: 30 }, (_, n) =>
      sigma.map((s, j) => s * Math.sin(1 + n * (j + 2) + n * n * 0.37)),
    );
    const written = (scale: readonly number[]) =>
      file(rows.map((row) => row.map((value, j) => value * scale[j]).join(' ')).join('\n'));
    const ofB = passed({ file: file(text), mocks: written([1, 1, 1]), spectrum });
    const asS = text.replace(/B \[Mpc\^6\]/, 'S').replace('sigma_B', 'sigma_S');
    const ofS = passed({ file: file(asS), mocks: written(factors) });
    ofB.covariance.forEach((value, k) => expect(value / ofS.covariance[k]).toBeCloseTo(1, 10));
    expect(ofB.mockMean![1] / ofS.mockMean![1]).toBeCloseTo(1, 10);
  });

  it('leave what was read as it was, so that it can be checked with another spectrum', () => {
    const data = Float64Array.from({ length: 9 }, (_, k) => (k % 4 === 0 ? 1e-14 : 0));
    const covariance = { rows: 3, columns: 3, data, lines: Int32Array.of(1, 2, 3), findings: [] };
    const first = passed({ file: file(text), covariance, spectrum });
    const again = passed({ file: file(text), covariance, spectrum });
    expect([...again.covariance]).toEqual([...first.covariance]);
    expect(data[0]).toBe(1e-14);
  });
});

describe('a bispectrum without what it needs is refused', () => {
  const text = triangles('1/Mpc', 'Mpc^6');
  const bare = text.replace(/ \[[^\]]*\]/g, '');

  it.each([
    ['no spectrum', text, null, /amplitude A_s, the tilt n_s of the power spectrum are missing/],
    ['no amplitude', text, { tilt: 1 }, /the amplitude A_s of the power spectrum is missing/],
    [
      'a tilt without its pivot',
      text,
      { amplitude: 2e-9, tilt: 0.96 },
      /pivot k_\* of the power spectrum is missing/,
    ],
    ['ln(10¹⁰ A_s) for A_s', text, { ...spectrum, amplitude: 3.04 }, /A_s is 3\.04/],
    ['n_s − 1 for n_s', text, { ...spectrum, tilt: -0.035 }, /n_s is −0\.035/],
    ['H₀ for h', text, { ...spectrum, h: 70 }, /h is 70/],
    ['k without a unit', bare, { ...spectrum, bispectrumUnit: 'Mpc^6' }, /unit of its wavenumbers/],
    ['B without a unit', bare, { ...spectrum, wavenumberUnit: '1/Mpc' }, /unit of B/],
    ['a unit that is none', text, { ...spectrum, pivotUnit: 'Mpc' }, /unit of the pivot, “Mpc”/],
    ['h/Mpc and B in Mpc⁶ without h', triangles('h/Mpc', 'Mpc^6'), spectrum, /some are in units with h/],
    [
      'a pivot in 1/Mpc beside h/Mpc without h',
      triangles('h/Mpc', '(Mpc/h)^6'),
      spectrum,
      /some are in units with h/,
    ],
    [
      'another unit by hand than the file says',
      text,
      { ...spectrum, bispectrumUnit: '(Mpc/h)^6' },
      /by hand/,
    ],
    ['no wavenumbers', 'kappa,B\n0.1,2\n0.2,3\n', spectrum, /wavenumbers that B needs/],
  ])('%s', (_, content, given, message) => {
    const { ok, checks } = preflight({ file: file(content), spectrum: given });
    expect(ok).toBe(false);
    const found = checks.filter(({ level }) => level === 'error');
    expect(found.map((each) => each.message).join(' ')).toMatch(message);
    expect(found.every(({ remedy }) => remedy)).toBe(true);
  });

  it('and once for wavenumbers of three columns', () => {
    expect(
      errors(bare, { ...spectrum, bispectrumUnit: 'Mpc^6' }).filter((each) => /unit-missing/.test(each)),
    ).toHaveLength(1);
  });

  it('but units by hand do where the file is silent', () => {
    const given = { ...spectrum, wavenumberUnit: '1/Mpc', bispectrumUnit: 'Mpc^6' };
    expect(passed({ file: file(bare), spectrum: given }).measurement.S[0]).toBeCloseTo(
      -11.613019685027943,
      12,
    );
  });

  it('and a file of S is only told that it needs none', () => {
    const { checks } = passed({ file: file('kappa,S,sigma\n0.1,2,1\n0.2,3,1\n'), spectrum });
    expect(checks.map(({ code }) => code)).toContain('spectrum-unused');
  });

  it('S and B cannot both be meant', () => {
    const both = file('k_long,k_short,S,B,sigma\n0.01,0.1,1,2,1\n0.02,0.1,1,2,1\n');
    expect(passed({ file: both }).mapping).toEqual({ kLong: 0, kShort: 1, S: 2, sigma: 4 });
    const mapping = { kLong: 0, kShort: 1, S: 2, B: 3, sigma: 4 };
    expect(placesOf(preflight({ file: both, mapping }).checks, 'error').join()).toContain(
      'shape-given-twice',
    );
  });
});

it.each([
  ['Mpc^6', 0, 1],
  ['Mpc⁶', 0, 1],
  ['(Mpc)^6', 0, 1],
  ['(Mpc/h)^6', 1, 1],
  ['(h⁻¹ Mpc)^6', 1, 1],
  ['h^-6 Mpc^6', 1, 1],
  ['Mpc**6 h**-6', 1, 1],
  ['Mpc^6/h^6', 1, 1],
  ['(Gpc/h)^6', 1, 1e-3],
])('%s is a unit of a bispectrum', (text, hubble, perMpc) => {
  expect(bispectrumUnit(text)).toEqual({ hubble, perMpc });
});

it.each(['Mpc^3', 'Mpc', '1/Mpc^6', 'Mpc^6 h', ''])('“%s” is none', (text) => {
  expect(bispectrumUnit(text)).toBeNull();
});
