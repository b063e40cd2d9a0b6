import type { Rng, Target } from '@/lib/sampler';
import { logGamma } from '@/lib/sampler';
import enso from './data/evidence/enso.json';
import problems from './data/evidence/problems.json';

/** The problems of data/evidence/README.md as targets: normalised priors and likelihoods, written from their words. */
export interface EvidenceProblem {
  name: string;
  target: Target;
  blocks: number[][];
  logZ: number;
  /** Exact posterior means and sds by parameter, where they are given and the posterior is no symmetric puzzle. */
  mean?: number[];
  sd?: number[];
}

const LN_2PI = Math.log(2 * Math.PI);
const none = (count: number): null[] => new Array<null>(count).fill(null);
const range = (count: number): number[] => Array.from({ length: count }, (_, i) => i);

function box(dimension: number, lo: number, hi: number) {
  const density = -dimension * Math.log(hi - lo);
  return {
    logPrior: (x: Float64Array) => (x.every((value) => value >= lo && value <= hi) ? density : -Infinity),
    drawPrior(rng: Rng, out: Float64Array) {
      for (let i = 0; i < dimension; i++) out[i] = lo + (hi - lo) * rng.uniform();
    },
  };
}

/** Lower Cholesky factor of a symmetric positive definite matrix. */
function choleskyOf(matrix: number[][]): number[][] {
  const factor = matrix.map((row) => row.map(() => 0));
  matrix.forEach((row, i) => {
    for (let j = 0; j <= i; j++) {
      let sum = row[j];
      for (let k = 0; k < j; k++) sum -= factor[i][k] * factor[j][k];
      factor[i][j] = i === j ? Math.sqrt(sum) : sum / factor[j][j];
    }
  });
  return factor;
}

type Linear =
  (typeof problems)['linear_2d'] | (typeof problems)['linear_5d'] | (typeof problems)['linear_10d'];

function linear(name: string, given: Linear): EvidenceProblem {
  const { X, y, sigma, prior_mean: centre, prior_cov: covariance } = given;
  const d = centre.length;
  const factor = choleskyOf(covariance);
  const logScale = factor.reduce((sum, row, i) => sum + Math.log(row[i]), 0);
  const logNoise = sigma.reduce((sum, s) => sum + Math.log(s), 0);
  const z = new Float64Array(d);
  const target: Target = {
    names: range(d).map((i) => `theta${i}`),
    periods: none(d),
    logPrior(x) {
      let squares = 0;
      for (let i = 0; i < d; i++) {
        let rest = x[i] - centre[i];
        for (let j = 0; j < i; j++) rest -= factor[i][j] * z[j];
        z[i] = rest / factor[i][i];
        squares += z[i] * z[i];
      }
      return -0.5 * (squares + d * LN_2PI) - logScale;
    },
    logLikelihood(x) {
      let squares = 0;
      for (let n = 0; n < y.length; n++) {
        let rest = y[n];
        for (let i = 0; i < d; i++) rest -= X[n][i] * x[i];
        squares += (rest / sigma[n]) ** 2;
      }
      return -0.5 * (squares + y.length * LN_2PI) - logNoise;
    },
    drawPrior(rng, out) {
      for (let i = 0; i < d; i++) z[i] = rng.normal();
      for (let i = 0; i < d; i++) {
        out[i] = centre[i];
        for (let j = 0; j <= i; j++) out[i] += factor[i][j] * z[j];
      }
    },
  };
  const mean = given.posterior_mean.map(Number);
  const sd = given.posterior_cov.map((row, i) => Math.sqrt(Number(row[i])));
  return { name, target, blocks: [], logZ: Number(given.logZ), mean, sd };
}

function bimodal(
  name: string,
  given: (typeof problems)['bimodal_2d'] | (typeof problems)['bimodal_5d'],
): EvidenceProblem {
  const { dim, box: bounds } = given;
  const modes = given.mu.map((mu, k) => ({
    mu: Number(mu),
    sd: Number(given.sd[k]),
    log: Math.log(Number(given.weights[k])) - dim * (0.5 * LN_2PI + Math.log(Number(given.sd[k]))),
  }));
  const target: Target = {
    names: range(dim).map((i) => `x${i}`),
    periods: none(dim),
    ...box(dim, Number(bounds[0]), Number(bounds[1])),
    logLikelihood(x) {
      const logs = modes.map(({ mu, sd, log }) => {
        let squares = 0;
        for (let i = 0; i < dim; i++) squares += ((x[i] - mu) / sd) ** 2;
        return log - squares / 2;
      });
      const top = Math.max(...logs);
      return top + Math.log(logs.reduce((sum, log) => sum + Math.exp(log - top), 0));
    },
  };
  return { name, target, blocks: [], logZ: Number(given.logZ) };
}

function knownSigma(): EvidenceProblem {
  const given = problems.conjugate_known_sigma;
  const sigma = Number(given.sigma);
  const target: Target = {
    names: ['mu'],
    periods: [null],
    logPrior: (x) => -0.5 * ((x[0] / 3) ** 2 + LN_2PI) - Math.log(3),
    logLikelihood: (x) =>
      given.y.reduce((sum, y) => sum - 0.5 * (((y - x[0]) / sigma) ** 2 + LN_2PI) - Math.log(sigma), 0),
    drawPrior: (rng, out) => void (out[0] = 3 * rng.normal()),
  };
  const moments = { mean: [Number(given.posterior_mean)], sd: [Number(given.posterior_sd)] };
  return { name: 'conjugate_known_sigma', target, blocks: [], logZ: Number(given.logZ), ...moments };
}

/** σ² ~ InvGamma(3, 4), μ | σ² ~ N(1, σ²/0.5). The gamma variate of integer shape is a sum of exponentials. */
function unknownSigma(): EvidenceProblem {
  const given = problems.conjugate_nig;
  const target: Target = {
    names: ['mu', 'sigma2'],
    periods: [null, null],
    logPrior([mu, s2]) {
      if (!(s2 > 0)) return -Infinity;
      const scale = 3 * Math.log(4) - logGamma(3) - 4 * Math.log(s2) - 4 / s2;
      return scale - 0.5 * (LN_2PI + Math.log(s2 / 0.5) + ((mu - 1) ** 2 * 0.5) / s2);
    },
    logLikelihood: ([mu, s2]) =>
      given.y.reduce((sum, y) => sum - 0.5 * (LN_2PI + Math.log(s2) + (y - mu) ** 2 / s2), 0),
    drawPrior(rng, out) {
      const gamma = -Math.log(rng.uniform()) - Math.log(rng.uniform()) - Math.log(rng.uniform());
      out[1] = 4 / gamma;
      out[0] = 1 + Math.sqrt(out[1] / 0.5) * rng.normal();
    },
  };
  const mean = [Number(given.mu_mean), Number(given.sigma2_mean)];
  const sd = [Number(given.mu_sd), Number(given.sigma2_sd)];
  return { name: 'conjugate_nig', target, blocks: [], logZ: Number(given.logZ), mean, sd };
}

function eggBox(): EvidenceProblem {
  const wave = (u: number) => Math.cos((5 * Math.PI * (2 * u - 1)) / 2);
  const target: Target = {
    names: ['x', 'y'],
    periods: [null, null],
    ...box(2, 0, 1),
    logLikelihood: ([x, y]) => (2 + wave(x) * wave(y)) ** 5,
  };
  return { name: 'egg_box', target, blocks: [], logZ: Number(problems.egg_box.logZ) };
}

function rosenbrock(): EvidenceProblem {
  const given = problems.rosenbrock;
  const target: Target = {
    names: ['x', 'y'],
    periods: [null, null],
    ...box(2, -5, 5),
    logLikelihood: ([x, y]) => -(100 * (y - x * x) ** 2 + (1 - x) ** 2),
  };
  const mean = [Number(given.mean_x), Number(given.mean_y)];
  const sd = [Number(given.sd_x), Number(given.sd_y)];
  return { name: 'rosenbrock', target, blocks: [], logZ: Number(given.logZ), mean, sd };
}

type Cosines = Omit<(typeof enso.models)['M4_annual_plus_both'], 'period_quantiles' | 'annual_period'> & {
  annual_period: number | null;
};

/** A constant, an annual term and free periods, with noise of known size; amplitudes N(0, 3), the constant N(10, 5). */
function cosines(name: string, given: Cosines): EvidenceProblem {
  const { names, period_prior_ranges: ranges, annual_period: annual } = given;
  const free = ranges.length;
  const { x: times, y } = enso.data;
  const sigma = enso.data_sigma;
  const pairs = (names.length - free - 1) / 2;
  const fixed = annual === null ? [] : [annual];
  const target: Target = {
    names,
    periods: none(names.length),
    logPrior(x) {
      let sum = 0;
      for (let k = 0; k < free; k++) {
        const [lo, hi] = ranges[k];
        if (!(x[k] >= lo && x[k] <= hi)) return -Infinity;
        sum -= Math.log(hi - lo);
      }
      sum -= 0.5 * (((x[free] - 10) / 5) ** 2 + LN_2PI) + Math.log(5);
      for (let i = free + 1; i < names.length; i++) sum -= 0.5 * ((x[i] / 3) ** 2 + LN_2PI) + Math.log(3);
      return sum;
    },
    logLikelihood(x) {
      let squares = 0;
      for (let n = 0; n < y.length; n++) {
        let rest = y[n] - x[free];
        for (let k = 0; k < pairs; k++) {
          const period = k < fixed.length ? fixed[k] : x[k - fixed.length];
          const phase = (2 * Math.PI * times[n]) / period;
          rest -= x[free + 1 + 2 * k] * Math.cos(phase) + x[free + 2 + 2 * k] * Math.sin(phase);
        }
        squares += rest * rest;
      }
      return -0.5 * (squares / (sigma * sigma) + y.length * (LN_2PI + 2 * Math.log(sigma)));
    },
    drawPrior(rng, out) {
      for (let k = 0; k < free; k++) out[k] = ranges[k][0] + (ranges[k][1] - ranges[k][0]) * rng.uniform();
      out[free] = 10 + 5 * rng.normal();
      for (let i = free + 1; i < names.length; i++) out[i] = 3 * rng.normal();
    },
  };
  const terms = range(free).map((k) => {
    const at = free + 1 + 2 * (k + fixed.length);
    return [k, at, at + 1];
  });
  return { name, target, blocks: terms, logZ: given.logZ, mean: given.mean, sd: given.sd };
}

export const evidenceProblems: EvidenceProblem[] = [
  linear('linear_2d', problems.linear_2d),
  linear('linear_5d', problems.linear_5d),
  linear('linear_10d', problems.linear_10d),
  bimodal('bimodal_2d', problems.bimodal_2d),
  bimodal('bimodal_5d', problems.bimodal_5d),
  knownSigma(),
  unknownSigma(),
  eggBox(),
  rosenbrock(),
  cosines('M0_constant', enso.models.M0_constant as Cosines),
  cosines('M1_annual', enso.models.M1_annual as Cosines),
  cosines('M2_annual_plus_long_period', enso.models.M2_annual_plus_long_period),
  cosines('M3_annual_plus_short_period', enso.models.M3_annual_plus_short_period),
  cosines('M4_annual_plus_both', enso.models.M4_annual_plus_both),
];
