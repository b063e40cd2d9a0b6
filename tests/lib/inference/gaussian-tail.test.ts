import { describe, expect, it } from 'vitest';
import { drawTruncatedNormal, erfcx, lnNormalInterval, normalCdf } from '@/lib/inference/gaussian-tail';
import { createRng } from '@/lib/sampler/rng';

/** Reference values by mpmath at 30 digits, derived by us. */
describe('the normal distribution far out', () => {
  it.each([
    [0, 1],
    [0.1, 0.89645697996912664],
    [1, 0.427583576155807],
    [3, 0.17900115118138995],
    [10, 0.056140992743822586],
    [50, 0.011281536265323773],
  ])('exp(x²) erfc(x) at %d to 1e-13', (x, value) => {
    expect(Math.abs(erfcx(x) / value - 1)).toBeLessThan(1e-13);
  });

  it.each([
    [-1, 2, -0.20016629432446258],
    [5, 6, -15.068446096529453],
    [-9, -8, -35.013618593437148],
    [0.3, 0.30001, -12.476865498190193],
    [-3, 3, -0.0027034470854759632],
    [30, 31, -454.32124395634325],
    [10, Infinity, -53.231285150512471],
  ])('ln probability of [%d, %d] to 1e-10', (a, b, value) => {
    expect(Math.abs(lnNormalInterval(a, b) - value)).toBeLessThan(1e-10);
  });

  it.each([
    [-Infinity, Infinity],
    [-0.5, 0.2],
    [0.5, 4],
    [6, Infinity],
    [-8, -7.5],
    [-3, 0.1],
    [2, 2.05],
  ])('draws restricted to [%d, %d] follow the restricted distribution', (a, b) => {
    const rng = createRng(`restricted ${a} ${b}`);
    const count = 20_000;
    const drawn = Float64Array.from({ length: count }, () =>
      drawTruncatedNormal(rng, 1, 2, 1 + 2 * a, 1 + 2 * b),
    ).sort();
    const whole = lnNormalInterval(a, b);
    let distance = 0;
    drawn.forEach((x, i) => {
      const z = (x - 1) / 2;
      expect(z >= a - 1e-12 && z <= b + 1e-12).toBe(true);
      const expected = a === -Infinity ? normalCdf(z) : Math.exp(lnNormalInterval(a, z) - whole);
      distance = Math.max(distance, Math.abs(expected - i / count), Math.abs(expected - (i + 1) / count));
    });
    // Kolmogorov–Smirnov at 1e-4.
    expect(distance * Math.sqrt(count)).toBeLessThan(2.23);
  });
});
