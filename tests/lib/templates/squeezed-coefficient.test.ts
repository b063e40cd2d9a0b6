import { describe, expect, it } from 'vitest';
import {
  complexLogGamma,
  squeezedCoefficient,
  squeezedLogModulus,
  writeMixtureCoefficient,
} from '@/lib/templates';

describe('the squeezed coefficient', () => {
  it.each([0, -1, NaN, Infinity])('is refused at mu = %f with a typed error', (mu) => {
    const refusal = expect.objectContaining({ name: 'TemplateError', code: 'invalid_mass', path: 'mu' });
    expect(() => squeezedCoefficient(mu, 1)).toThrow(refusal);
    expect(() => squeezedLogModulus(mu, 2)).toThrow(refusal);
    expect(() => writeMixtureCoefficient(mu, 0.3, new Float64Array(2))).toThrow(refusal);
  });
  it('has the modulus that is stated in closed form, at every mass', () => {
    for (let mu = 0.05; mu <= 100; mu *= 1.07) {
      for (const vertex of [1, 2] as const) {
        const { re, im } = squeezedCoefficient(mu, vertex);
        // Without squares, which would underflow at large mu.
        const size = Math.max(Math.abs(re), Math.abs(im));
        const logModulus = Math.log(size) + Math.log(Math.hypot(re / size, im / size));
        expect(Math.abs(logModulus - squeezedLogModulus(mu, vertex))).toBeLessThan(3e-13);
      }
    }
  });
  it('approaches its asymptote with the stated corrections as the mass grows', () => {
    for (const mu of [30, 60, 100]) {
      const { re, im } = squeezedCoefficient(mu, 1);
      const phase = (7 * Math.PI) / 4 - mu * Math.log(4) - 15 / (8 * mu);
      const modulus = (Math.PI ** 1.5 / 8) * mu ** 1.5 * Math.exp(-Math.PI * mu) * (1 + 5 / (4 * mu * mu));
      expect(Math.abs(re / modulus - Math.cos(phase))).toBeLessThan(3 / mu ** 3);
      expect(Math.abs(im / modulus - Math.sin(phase))).toBeLessThan(3 / mu ** 3);
    }
  });
  it('of a mixture is cos alpha of the first vertex plus sin alpha of the second', () => {
    const out = new Float64Array(2);
    for (const alpha of [-1.2, 0, 0.4, Math.PI / 2]) {
      writeMixtureCoefficient(2.3, alpha, out);
      const [one, two] = [squeezedCoefficient(2.3, 1), squeezedCoefficient(2.3, 2)];
      expect(out[0]).toBeCloseTo(Math.cos(alpha) * one.re + Math.sin(alpha) * two.re, 16);
      expect(out[1]).toBeCloseTo(Math.cos(alpha) * one.im + Math.sin(alpha) * two.im, 16);
    }
  });
});

describe('complex log-Gamma', () => {
  it('obeys the recurrence and the reflection formula', () => {
    const at = (re: number, im: number): Float64Array => {
      const out = new Float64Array(2);
      complexLogGamma(re, im, out);
      return out;
    };
    for (const [re, im] of [
      [0.25, 0.1],
      [0.25, 7],
      [-3.4, 2],
      [9.9, 0.2],
      [4, -6],
    ]) {
      const [a, b] = [at(re, im), at(re + 1, im)];
      expect(b[0] - a[0]).toBeCloseTo(Math.log(Math.hypot(re, im)), 13);
      expect(Math.cos(b[1] - a[1] - Math.atan2(im, re))).toBeCloseTo(1, 14);
      // |Γ(z) Γ(1−z)| = π / |sin πz|
      const reflected = at(1 - re, -im);
      const sine = Math.hypot(
        Math.sin(Math.PI * re) * Math.cosh(Math.PI * im),
        Math.cos(Math.PI * re) * Math.sinh(Math.PI * im),
      );
      expect(a[0] + reflected[0]).toBeCloseTo(Math.log(Math.PI / sine), 12);
    }
  });
  it('is infinite at the poles and zero at one and two', () => {
    const out = new Float64Array(2);
    for (const pole of [0, -1, -5]) {
      complexLogGamma(pole, 0, out);
      expect(out[0]).toBe(Infinity);
    }
    for (const one of [1, 2]) {
      complexLogGamma(one, 0, out);
      expect(Math.abs(out[0])).toBeLessThan(1e-14);
      expect(out[1]).toBe(0);
    }
  });
});
