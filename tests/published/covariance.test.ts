import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { buildLikelihood, InferenceError, matchedExponent } from '@/lib/inference';
import { buildWhitening } from '@/lib/inference/whitening';
import checks from './data/covariance/covariance_checks.json';

/** Reference values derived by us (see data/covariance/README.md). */
const close = (value: number, reference: string | number): void =>
  expect(Math.abs(value - Number(reference))).toBeLessThan(1e-10 * Math.max(1, Math.abs(Number(reference))));

function mocksOf(file: string): number[][] {
  const path = fileURLToPath(new URL(`./data/covariance/${file}`, import.meta.url));
  return readFileSync(path, 'utf8')
    .trim()
    .split('\n')
    .filter((line) => /^[-+.\d]/.test(line))
    .map((line) => line.split(',').map(Number));
}

function sampleCovariance(mocks: number[][]): Float64Array {
  const p = mocks[0].length;
  const mean = Array.from(
    { length: p },
    (_, i) => mocks.reduce((sum, row) => sum + row[i], 0) / mocks.length,
  );
  const out = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < p; j += 1) {
      const sum = mocks.reduce((total, row) => total + (row[i] - mean[i]) * (row[j] - mean[j]), 0);
      out[i * p + j] = sum / (mocks.length - 1);
    }
  }
  return out;
}

describe('likelihoods for a covariance from mocks', () => {
  it.each(checks.likelihood_examples)('agree with $mocks_file to 1e-10', (example) => {
    const mocks = mocksOf(example.mocks_file);
    expect(mocks).toHaveLength(example.n_s);
    const residual = Float64Array.from(example.data, (value, i) => value - example.model[i]);
    const whitening = buildWhitening({
      S: residual,
      covariance: sampleCovariance(mocks),
      mockCount: example.n_s,
    });
    const chiSquare = whitening.data.reduce((sum, value) => sum + value * value, 0);
    close(chiSquare, example.chi2_with_S_inverse);
    close(whitening.logDeterminant, example.logdet_S);
    const logDensity = (
      kind: 'normal' | 'hartlap' | 'sellentin-heavens' | 'matched-t',
      at = chiSquare,
    ): number =>
      buildLikelihood(kind, example.n_s, example.n_d, example.n_p, whitening.logDeterminant).logDensity(at);
    close(logDensity('normal'), example.loglike_gaussian_S);
    close(logDensity('hartlap'), example.loglike_gaussian_hartlap_normalised);
    close(logDensity('sellentin-heavens'), example.loglike_SH2016_normalised);
    // The reference leaves out the constants of the matched form.
    close(logDensity('matched-t') - logDensity('matched-t', 0), example.log_percival2022_unnormalised);
  });

  it.each(checks.factors.filter((factors) => factors.percival2022_m !== undefined))(
    'have the exponent and factor of n_s $n_s, n_d $n_d, n_p $n_p',
    (factors) => {
      close(matchedExponent(factors.n_s, factors.n_d, factors.n_p), factors.percival2022_m ?? NaN);
      const { scale } = buildLikelihood('hartlap', factors.n_s, factors.n_d, factors.n_p, 0);
      close(scale, factors.hartlap ?? NaN);
    },
  );

  it.each(checks.factors.filter((factors) => factors.percival2022_m === undefined))(
    'refuse $n_s mocks for $n_d data values and say how many are needed',
    (factors) => {
      const build = (): unknown => buildLikelihood('matched-t', factors.n_s, factors.n_d, factors.n_p, 0);
      expect(build).toThrow(InferenceError);
      expect(build).toThrow(`at least ${factors.n_d + 5} are needed`);
    },
  );
});
