import { describe, expect, it } from 'vitest';
import { contourRings, ringsPath } from '@/lib/figures/contour-paths';
import { cornerMasses, joint, jointPaths, marginal, marginalText } from '@/lib/figures/corner';
import { cornerSketcher } from '@/lib/figures/corner-sketch';
import { density1d, density2d, densityAtDraws, gridAxis } from '@/lib/figures/density';
import { massLevels } from '@/lib/figures/mass-levels';
import { quantileOfSorted, sortedFinite } from '@/lib/figures/quantiles';
import { normalPairs } from './normal-pairs';

describe('quantiles', () => {
  it('are of type 7: linear between order statistics', () => {
    // R: quantile(c(1, 2, 4, 8), c(0.16, 0.5, 0.84)) gives 1.48, 3, 6.08 (by hand: h = 3p).
    const sorted = sortedFinite([8, 1, NaN, 4, 2]);
    expect(quantileOfSorted(sorted, 0.16)).toBeCloseTo(1.48, 12);
    expect(quantileOfSorted(sorted, 0.5)).toBe(3);
    expect(quantileOfSorted(sorted, 0.84)).toBeCloseTo(6.08, 12);
    expect(quantileOfSorted(new Float64Array(0), 0.5)).toBeNaN();
  });
});

describe('levels of enclosed mass', () => {
  it('of a normal density on a grid are exp(−χ²/2) with χ² = −2 ln(1 − mass)', () => {
    const n = 401;
    const at = (i: number) => -5 + (10 * i) / (n - 1);
    const grid = Float64Array.from({ length: n * n }, (_, k) => {
      const x = at(k % n);
      const y = at(Math.floor(k / n));
      return Math.exp(-(x * x + y * y) / 2);
    });
    const [l68, l95] = massLevels(grid, [0.68, 0.95]);
    // The level at mass p of the density exp(−r²/2) is 1 − p.
    expect(l68).toBeCloseTo(0.32, 3);
    expect(l95).toBeCloseTo(0.05, 3);
  });

  it('of single draws leave the wished share below them', () => {
    const values = Float64Array.from({ length: 1000 }, (_, i) => i + 1);
    const [l68] = massLevels(values, [0.68], 'draws');
    // 680 of 1 000, give or take the one draw on the level.
    expect(Math.abs(values.filter((v) => v > l68).length - 680)).toBeLessThanOrEqual(1);
    expect(massLevels([], [0.68], 'draws')).toEqual([0]);
  });

  it.each([0, 0.9])(
    'of normal draws with correlation %f enclose 68 and 95 % of the true mass within 1 %',
    (rho) => {
      const { x, y } = normalPairs(40_000, rho);
      const [mx, my] = [marginal(x), marginal(y)];
      const { levels } = joint(x, y, mx.axis, my.axis);
      const density = density2d(x, y, mx.axis, my.axis);
      // An independent sample of the same normal tells how much true mass the regions hold.
      const test = normalPairs(60_000, rho, 7919);
      const at = densityAtDraws(density, test.x, test.y, mx.axis, my.axis);
      cornerMasses.forEach((mass, i) => {
        const inside = at.filter((v) => v >= levels[i]).length / at.length;
        expect(Math.abs(inside - mass)).toBeLessThan(0.01);
      });
    },
  );
});

/** Share of points inside closed rings by the even-odd rule, which takes holes out. */
function shareInside(rings: readonly Float64Array[], x: ArrayLike<number>, y: ArrayLike<number>): number {
  let inside = 0;
  for (let i = 0; i < x.length; i++) {
    let crossings = 0;
    for (const ring of rings)
      for (let k = 0; k + 3 < ring.length; k += 2) {
        const [x0, y0, x1, y1] = [ring[k], ring[k + 1], ring[k + 2], ring[k + 3]];
        if (y0 > y[i] !== y1 > y[i] && x[i] < x0 + ((y[i] - y0) * (x1 - x0)) / (y1 - y0)) crossings++;
      }
    inside += crossings % 2;
  }
  return inside / x.length;
}

/** A bent, a two-peaked and a plain set of draws, from independent normals. */
const shapes = {
  normal: (u: number, v: number) => [u, 0.8 * u + 0.6 * v],
  banana: (u: number, v: number) => [u, 0.5 * u * u + 0.3 * v],
  'two peaks of 3 to 1': (u: number, v: number, i: number) => [u + (i % 4 ? 0 : 9), v],
} as const;

describe('the regions as they are drawn', () => {
  const n = 10_000;
  const drawsOf = (shape: keyof typeof shapes, seed: number) => {
    const { x: u, y: v } = normalPairs(n, 0, seed);
    const pairs = Array.from(u, (_, i) => shapes[shape](u[i], v[i], i));
    return { x: pairs.map(([first]) => first), y: pairs.map(([, second]) => second) };
  };

  it.each(Object.keys(shapes) as (keyof typeof shapes)[])(
    'enclose 68 and 95 %% of the draws of a %s, by points inside their outlines',
    (shape) => {
      const { x, y } = drawsOf(shape, 11);
      const both = joint(x, y, marginal(x).axis, marginal(y).axis);
      cornerMasses.forEach((mass, i) => {
        // The level is a quantile of the draws' own density, so what is left is one draw and the straight pieces of the
        // outline between centres of cells.
        expect(Math.abs(both.enclosed[i] - mass)).toBeLessThan(2 / n);
        expect(Math.abs(shareInside(both.regions[i], x, y) - mass)).toBeLessThan(0.004);
      });
    },
  );

  it.each(Object.keys(shapes) as (keyof typeof shapes)[])(
    'enclose 68 and 95 %% of other draws of the same %s',
    (shape) => {
      const { x, y } = drawsOf(shape, 11);
      const other = drawsOf(shape, 12);
      const both = joint(x, y, marginal(x).axis, marginal(y).axis);
      cornerMasses.forEach((mass, i) => {
        // Four standard errors of the difference of two binomial shares.
        const error = 4 * Math.sqrt((2 * mass * (1 - mass)) / n);
        expect(Math.abs(shareInside(both.regions[i], other.x, other.y) - mass)).toBeLessThan(error);
      });
    },
  );

  it('are two where there are two peaks', () => {
    const { x, y } = drawsOf('two peaks of 3 to 1', 11);
    const { regions } = joint(x, y, marginal(x).axis, marginal(y).axis);
    const left = regions[0].filter((ring) => ring[0] < 4.5);
    expect(left.length).toBeGreaterThan(0);
    expect(regions[0].length).toBeGreaterThan(left.length);
  });
});

describe('the smoothed density', () => {
  it('integrates to the share of draws inside the grid', () => {
    const { x } = normalPairs(20_000, 0);
    const axis = gridAxis(sortedFinite(x));
    const density = density1d(x, axis);
    const integral = (density.reduce((s, v) => s + v, 0) * (axis.hi - axis.lo)) / axis.cells;
    expect(integral).toBeGreaterThan(0.99);
    expect(integral).toBeLessThan(1.0001);
  });

  it('of a normal stands at its centre where smoothing and noise put it', () => {
    const { x } = normalPairs(40_000, 0);
    const axis = gridAxis(sortedFinite(x));
    const density = density1d(x, axis);
    const middle = density[Math.floor(((0 - axis.lo) / (axis.hi - axis.lo)) * axis.cells)];
    // Bandwidth h = 0.9 n^(−1/6) = 0.154: smoothing lowers the peak by h²/2 = 1.2 %, and the noise of the estimate,
    // √(0.282 / (n h 0.399)), is 1.1 %; three of these and the bias make 4.4 %.
    expect(Math.abs(middle * Math.sqrt(2 * Math.PI) - 1)).toBeLessThan(0.044);
  });

  it('keeps its mass at a wall instead of letting it leak', () => {
    const { x } = normalPairs(40_000, 0);
    const half = x.map(Math.abs);
    const axis = gridAxis(sortedFinite(half));
    expect(axis.wallLo).toBe(true);
    expect(axis.wallHi).toBe(false);
    const density = density1d(half, axis);
    // The half-normal starts at √(2/π) = 0.798; smoothing without reflection would start at half of it.
    expect(density[0]).toBeGreaterThan(0.77);
    expect(density[0]).toBeLessThan(0.83);
  });

  it('stands on a grid of width one where all draws are equal', () => {
    const axis = gridAxis(Float64Array.of(2, 2, 2));
    expect([axis.lo, axis.hi]).toEqual([1.5, 2.5]);
    const [place] = [{ left: 0, top: 0, size: 100 }];
    const { axis: one } = marginal([2, 2, 2]);
    expect(jointPaths(one, one, joint([2, 2, 2], [2, 2, 2], one, one), place).inner).toMatch(/^M.*Z$/);
  });
});

describe('contours', () => {
  it('of a round normal are closed curves of the expected radius', () => {
    const n = 101;
    const axis = { lo: -5, hi: 5, cells: n, bandwidth: 1, wallLo: false, wallHi: false };
    const at = (i: number) => -5 + (10 * (i + 0.5)) / n;
    const grid = Float64Array.from({ length: n * n }, (_, k) =>
      Math.exp(-(at(k % n) ** 2 + at(Math.floor(k / n)) ** 2) / 2),
    );
    const [rings] = contourRings(grid, axis, axis, [0.05]);
    const path = ringsPath(
      rings,
      (v) => 100 * v,
      (v) => 100 * v,
    );
    const points = path
      .slice(1, -1)
      .split('L')
      .map((p) => p.split(' ').map(Number));
    expect(points.length).toBeGreaterThan(40);
    const radius = 100 * Math.sqrt(-2 * Math.log(0.05));
    for (const [px, py] of points) expect(Math.abs(Math.hypot(px, py) - radius)).toBeLessThan(0.01 * radius);
  });

  it('of 100 000 draws in five parameters cost less than a second of one processor', () => {
    const draws = Array.from({ length: 5 }, (_, i) => normalPairs(100_000, 0, 100 + i).x);
    // Processor time, not the clock on the wall, which other work on the machine stretches.
    const start = process.cpuUsage();
    const { marginals, joints } = cornerSketcher(draws)([0, 1, 2, 3, 4]);
    const place = { left: 0, top: 0, size: 125 };
    const paths = joints.flatMap((row, r) =>
      row.map((both, c) => jointPaths(marginals[c].axis, marginals[r].axis, both, place)),
    );
    const spent = process.cpuUsage(start);
    const seconds = (spent.user + spent.system) / 1e6;
    expect(paths).toHaveLength(10);
    expect(seconds).toBeLessThan(1);
  });
});

describe('the words above a diagonal panel', () => {
  it('take their digits from the Monte Carlo error', () => {
    const m = { ...marginal([0, 1, 2]), median: 3.6187, q16: 3.44, q84: 3.81 };
    expect(marginalText(m, 0.006)).toEqual({ median: '3.6', up: '+0.2', down: '−0.2' });
    expect(marginalText(m)).toEqual({ median: '3.62', up: '+0.19', down: '−0.18' });
  });
});
