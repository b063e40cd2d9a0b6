import { describe, expect, it } from 'vitest';
import { findingCodes, MeasurementError, parseMatrix, parseMeasurement, preflight } from '@/lib/measurements';
import { load } from './measurement-files';
import { generator, mutate } from './mutants';

const codes = new Set<string>(findingCodes);

describe('mutants of good files', () => {
  it.each([
    ['one-field.csv', 11],
    ['null.dat', 12],
    ['files/semicolon_decimal_comma.csv', 13],
  ])('of %s end in a table or a typed error, and none that passes is unsound', (name, seed) => {
    const { bytes } = load(name);
    const below = generator(seed);
    const outcomes = { passed: 0, refused: 0, unreadable: 0 };
    for (let n = 0; n < 667; n += 1) {
      const mutant = mutate(bytes, below);
      try {
        const table = parseMeasurement(mutant, name);
        expect(table.data.every((column) => column.length === table.rows)).toBe(true);
        expect(table.findings.every(({ code }) => codes.has(code))).toBe(true);
      } catch (error) {
        if (!(error instanceof MeasurementError)) throw error;
        outcomes.unreadable += 1;
      }
      const result = preflight({ file: { bytes: mutant, name } });
      expect(
        result.checks.every(
          ({ code, level, remedy }) => codes.has(code) && (level === 'ok' || Boolean(remedy)),
        ),
      ).toBe(true);
      expect(result.ok).toBe(!result.checks.some(({ level }) => level === 'error'));
      if (!result.ok) outcomes.refused += 1;
      else {
        outcomes.passed += 1;
        const { kappa, S, sigma } = result.measurement;
        expect([...S, ...kappa].every(Number.isFinite)).toBe(true);
        expect(kappa.every((value, i) => value > 0 && value < 2 && (i === 0 || value >= kappa[i - 1]))).toBe(
          true,
        );
        expect(sigma?.every((value) => value > 0)).toBe(true);
        expect(result.covariance).toHaveLength(kappa.length ** 2);
      }
    }
    // All three ends must be met, or the mutants test nothing.
    expect(Math.min(...Object.values(outcomes))).toBeGreaterThan(10);
  });

  it('of a covariance end in a matrix or a typed error', () => {
    const { bytes } = load('files/cov_ok.txt');
    const below = generator(14);
    const start = bytes.subarray(0, 4000);
    for (let n = 0; n < 500; n += 1) {
      try {
        const matrix = parseMatrix(mutate(start, below), 'cov.txt', { part: 'covariance' });
        expect(matrix.data).toHaveLength(matrix.rows * matrix.columns);
        const bad = matrix.data.some((value) => !Number.isFinite(value));
        if (bad) expect(matrix.findings.some(({ level }) => level === 'error')).toBe(true);
      } catch (error) {
        if (!(error instanceof MeasurementError)) throw error;
        expect(codes.has(error.code)).toBe(true);
      }
    }
  });
});
