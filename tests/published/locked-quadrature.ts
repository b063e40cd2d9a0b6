import { CholeskyDecomposition, Matrix, solve } from 'ml-matrix';
import { squeezedCoefficient } from '@/lib/templates';
import { gaussLegendre } from '../lib/templates/gauss-legendre';

/**
 * The posterior of two mixed fields with locked phases (vertex 2) by quadrature, written independently of lib/inference:
 * S = g [cos²θ s(μ1) + sin²θ s(μ2)] + Σ c_p ⟨κ^p⟩, s(μ) = ⟨κ^½ Re C₂(μ) κ^{iμ}⟩, averages by 16-point Gauss–Legendre in ln κ.
 *
 * The t likelihood is a mixture of normal ones, (1 + χ²/(N − 1))^{−m/2} ∝ ∫ du u^{m/2−1} e^{−u} exp(−u χ²/(N − 1)): at each of a
 * row of nodes in ln u the linear terms (g and c_p, normal priors) are integrated exactly. The data hold one combination of θ, μ1
 * and μ2 within a few thousandths: mostly μ1, or μ2 where θ is near π/2. So both masses run over a fine even grid up to where
 * either may be held, μ2 beyond that and θ over Gauss–Legendre panels.
 */
export interface LockedProblem {
  lo: Float64Array;
  hi: Float64Array;
  S: Float64Array;
  covariance: Float64Array;
  mocks: number;
  /** m of the t likelihood. */
  exponent: number;
  /** Range of the uniform priors of both masses. */
  massRange: readonly [number, number];
  /** Upper end of the fine grid of both masses: no posterior to speak of may have μ1 beyond it. */
  fineEnd: number;
  fineStep: number;
  couplingSd: number;
  backgroundSd: number;
  powers: readonly number[];
}

export interface LockedAnswer {
  mean: { mu1: number; mu2: number; theta: number };
  sd: { mu1: number; mu2: number; theta: number };
}

const BIN_RULE = gaussLegendre(16);

function binMean(lo: number, hi: number, f: (logKappa: number) => number): number {
  const half = 0.5 * Math.log(hi / lo);
  const middle = 0.5 * Math.log(hi * lo);
  return 0.5 * BIN_RULE.reduce((sum, [node, weight]) => sum + weight * f(middle + half * node), 0);
}

/** Nodes and weights of composite Gauss–Legendre between the edges. */
function panels(edges: readonly number[], order: number): { x: number; weight: number }[] {
  const rule = gaussLegendre(order);
  return edges.slice(1).flatMap((end, i) => {
    const half = 0.5 * (end - edges[i]);
    return rule.map(([node, weight]) => ({ x: edges[i] + half * (1 + node), weight: half * weight }));
  });
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += a[i] * b[i];
  return sum;
}

export function lockedPosterior(problem: LockedProblem, order = 12): LockedAnswer {
  const { S, lo, hi, mocks, exponent, powers } = problem;
  const p = S.length;
  const covariance = new Matrix(
    Array.from({ length: p }, (_, i) => [...problem.covariance.subarray(i * p, (i + 1) * p)]),
  );
  const lower = new CholeskyDecomposition(covariance).lowerTriangularMatrix;
  const whiten = (column: number[]): Float64Array =>
    Float64Array.from(solve(lower, Matrix.columnVector(column)).to1DArray());
  const whitener = solve(lower, Matrix.eye(p))
    .to2DArray()
    .map((row) => Float64Array.from(row));
  const quickly = (column: Float64Array): Float64Array =>
    Float64Array.from(whitener, (row) => dot(row, column));
  const signal = (mu: number): Float64Array => {
    const { re, im } = squeezedCoefficient(mu, 2);
    return quickly(
      Float64Array.from(lo, (from, i) =>
        binMean(from, hi[i], (x) => Math.exp(0.5 * x) * (re * Math.cos(mu * x) - im * Math.sin(mu * x))),
      ),
    );
  };
  const data = whiten([...S]);
  const background = powers.map((power) =>
    whiten(Array.from(lo, (from, i) => binMean(from, hi[i], (x) => Math.exp(power * x)))),
  );
  const field = (mu: number) => {
    const column = signal(mu);
    return {
      mu,
      column,
      data: dot(column, data),
      square: dot(column, column),
      mixed: background.map((b) => dot(b, column)),
    };
  };
  const nb = powers.length;
  const dataSquare = dot(data, data);
  const backgroundData = background.map((column) => dot(column, data));
  const backgroundGram = background.map((a) => background.map((b) => dot(a, b)));

  // ln u round its mode, u ~ Gamma(m/2): its sd is about √(2/m).
  const step = 0.9 * Math.sqrt(2 / exponent);
  const scales = [0, -1, 1, -2, 2, -3, 3, -4, 4].map((k) => Math.log(exponent / 2) + k * step);
  const [from, to] = problem.massRange;
  const count = Math.round((problem.fineEnd - from) / problem.fineStep);
  const fine = Array.from({ length: count }, (_, k) => from + ((k + 0.5) * (problem.fineEnd - from)) / count);
  const firsts = fine.map(field);
  const beyond = [0, 0.1, 0.25, 0.45, 0.7, 1].map((part) => problem.fineEnd + part * (to - problem.fineEnd));
  const seconds = [
    ...fine.map((x) => ({ x, weight: (problem.fineEnd - from) / count })),
    ...panels(beyond, order),
  ];
  const angles = panels([0, 0.2, 0.4, 0.6, 0.8, 1, 1.2, 1.4, Math.PI / 2], order);

  const n = nb + 1;
  const factor = new Float64Array(n * n);
  const rest = new Float64Array(n);
  /** ln of (evidence at this scale × its weight) for a signal column of these products. */
  const logEvidence = (
    square: number,
    product: number,
    mixed: (k: number) => number,
    logScale: number,
  ): number => {
    const lambda = (2 * Math.exp(logScale)) / (mocks - 1);
    let logDeterminant = 0;
    let gain = 0;
    for (let i = 0; i < n; i += 1) {
      rest[i] = lambda * (i === 0 ? product : backgroundData[i - 1]);
      for (let j = 0; j <= i; j += 1) {
        let value = lambda * (i === 0 ? square : j === 0 ? mixed(i - 1) : backgroundGram[i - 1][j - 1]);
        if (i === j) value += 1 / (i === 0 ? problem.couplingSd : problem.backgroundSd) ** 2;
        for (let k = 0; k < j; k += 1) value -= factor[i * n + k] * factor[j * n + k];
        factor[i * n + j] = i === j ? Math.sqrt(value) : value / factor[j * n + j];
      }
      for (let k = 0; k < i; k += 1) rest[i] -= factor[i * n + k] * rest[k];
      rest[i] /= factor[i * n + i];
      gain += rest[i] * rest[i];
      logDeterminant += 2 * Math.log(factor[i * n + i]);
    }
    return (
      0.5 * exponent * logScale - Math.exp(logScale) - 0.5 * (lambda * dataSquare - gain + logDeterminant)
    );
  };

  let total = 0;
  let largest = -Infinity;
  const sums = new Float64Array(6);
  for (const second of seconds) {
    const b = field(second.x);
    const cross = firsts.map((a) => dot(a.column, b.column));
    for (const angle of angles) {
      const theta = angle.x;
      const w1 = Math.cos(theta) ** 2;
      const w2 = Math.sin(theta) ** 2;
      firsts.forEach((a, k) => {
        if (a.mu > b.mu) return;
        const half = a.mu === b.mu ? 0.5 : 1;
        const square = w1 * w1 * a.square + 2 * w1 * w2 * cross[k] + w2 * w2 * b.square;
        const product = w1 * a.data + w2 * b.data;
        const mixed = (c: number): number => w1 * a.mixed[c] + w2 * b.mixed[c];
        for (const logScale of scales) {
          const log = logEvidence(square, product, mixed, logScale);
          // The first scale is the middle one: where that is hopeless the others are too.
          if (log < largest - 40) return;
          if (log > largest) {
            const shrink = Math.exp(largest - log);
            total *= shrink;
            for (let i = 0; i < 6; i += 1) sums[i] *= shrink;
            largest = log;
          }
          const weight = half * second.weight * angle.weight * Math.exp(log - largest);
          total += weight;
          [a.mu, b.mu, theta].forEach((value, i) => {
            sums[i] += weight * value;
            sums[3 + i] += weight * value * value;
          });
        }
      });
    }
  }
  const [mu1, mu2, theta] = [0, 1, 2].map((i) => sums[i] / total);
  const [sd1, sd2, sd3] = [mu1, mu2, theta].map((mean, i) => Math.sqrt(sums[3 + i] / total - mean * mean));
  return { mean: { mu1, mu2, theta }, sd: { mu1: sd1, mu2: sd2, theta: sd3 } };
}
