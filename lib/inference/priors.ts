import type { ParameterDeclaration, Prior } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import { InferenceError } from './inference-error';
import { drawTruncatedNormal, lnNormalInterval, lnTruncatedNormal, normalCdf } from './gaussian-tail';

/**
 * Prior densities of one parameter. All densities are normalised and natural logarithms are used; units are those of
 * the parameter. `isotropic` is a density of all mixing angles together and lives in `mixing-prior.ts`.
 */

/** A prior that is a density of one number: everything but `fixed` and `isotropic`. */
export type ScalarPrior = Exclude<Prior, { kind: 'fixed' } | { kind: 'isotropic' }>;

/** True for a prior that is a density of one number. */
export function isScalarPrior(prior: Prior): prior is ScalarPrior {
  return prior.kind !== 'fixed' && prior.kind !== 'isotropic';
}

/** Smallest closed interval outside which the density is zero; infinite ends where it has none. */
export function priorSupport(prior: ScalarPrior): readonly [number, number] {
  switch (prior.kind) {
    case 'uniform':
    case 'log-uniform':
    case 'truncated-normal':
      return [prior.lo, prior.hi];
    case 'half-normal':
      return [0, Infinity];
    case 'normal':
      return [-Infinity, Infinity];
  }
}

/**
 * ln density at x; −Infinity outside the support. uniform 1/(hi − lo); log-uniform 1/(x ln(hi/lo)); normal;
 * half-normal √(2/π)/sd exp(−x²/2sd²), x ≥ 0; truncated-normal: the parent divided by its probability in [lo, hi].
 */
export function lnPriorDensity(prior: ScalarPrior, x: number): number {
  switch (prior.kind) {
    case 'uniform':
      return x >= prior.lo && x <= prior.hi ? -Math.log(prior.hi - prior.lo) : -Infinity;
    case 'log-uniform':
      return x >= prior.lo && x <= prior.hi ? -Math.log(x * Math.log(prior.hi / prior.lo)) : -Infinity;
    case 'normal':
      return lnTruncatedNormal(x, prior.mean, prior.sd, -Infinity, Infinity);
    case 'half-normal':
      return lnTruncatedNormal(x, 0, prior.sd, 0, Infinity);
    case 'truncated-normal':
      return lnTruncatedNormal(x, prior.mean, prior.sd, prior.lo, prior.hi);
  }
}

/** Probability that the parameter is below x, in [0, 1]. */
export function priorCdf(prior: ScalarPrior, x: number): number {
  const [lo, hi] = priorSupport(prior);
  if (x <= lo) return 0;
  if (x >= hi) return 1;
  switch (prior.kind) {
    case 'uniform':
      return (x - lo) / (hi - lo);
    case 'log-uniform':
      return Math.log(x / lo) / Math.log(hi / lo);
    case 'normal':
      return normalCdf((x - prior.mean) / prior.sd);
    case 'half-normal':
      return Math.exp(lnNormalInterval(0, x / prior.sd) + Math.LN2);
    case 'truncated-normal': {
      const a = (lo - prior.mean) / prior.sd;
      const b = (hi - prior.mean) / prior.sd;
      return Math.exp(lnNormalInterval(a, (x - prior.mean) / prior.sd) - lnNormalInterval(a, b));
    }
  }
}

/** One exact draw. Consumes a number of random numbers that may vary (rejection for truncated normals). */
export function drawFromPrior(prior: ScalarPrior, rng: Rng): number {
  switch (prior.kind) {
    case 'uniform':
      return prior.lo + (prior.hi - prior.lo) * rng.uniform();
    case 'log-uniform':
      return Math.min(prior.hi, prior.lo * Math.exp(Math.log(prior.hi / prior.lo) * rng.uniform()));
    case 'normal':
      return prior.mean + prior.sd * rng.normal();
    case 'half-normal':
      return Math.abs(prior.sd * rng.normal());
    case 'truncated-normal':
      return drawTruncatedNormal(rng, prior.mean, prior.sd, prior.lo, prior.hi);
  }
}

/** Mean and standard deviation; every scalar prior here has both. */
export function priorMoments(prior: ScalarPrior): { mean: number; sd: number } {
  switch (prior.kind) {
    case 'uniform':
      return { mean: 0.5 * (prior.lo + prior.hi), sd: (prior.hi - prior.lo) / Math.sqrt(12) };
    case 'log-uniform': {
      const span = Math.log(prior.hi / prior.lo);
      const mean = (prior.hi - prior.lo) / span;
      const square = (prior.hi * prior.hi - prior.lo * prior.lo) / (2 * span);
      return { mean, sd: Math.sqrt(Math.max(0, square - mean * mean)) };
    }
    case 'normal':
      return { mean: prior.mean, sd: prior.sd };
    case 'half-normal':
      return { mean: prior.sd * Math.sqrt(2 / Math.PI), sd: prior.sd * Math.sqrt(1 - 2 / Math.PI) };
    case 'truncated-normal': {
      // E and Var of the standard normal on [a, b]: with p = φ/(Φ(b) − Φ(a)), E = p(a) − p(b),
      // Var = 1 + a p(a) − b p(b) − E².
      const a = (prior.lo - prior.mean) / prior.sd;
      const b = (prior.hi - prior.mean) / prior.sd;
      const density = (z: number): number =>
        Number.isFinite(z)
          ? Math.exp(-0.5 * z * z - 0.5 * Math.log(2 * Math.PI) - lnNormalInterval(a, b))
          : 0;
      const pa = density(a);
      const pb = density(b);
      const shift = pa - pb;
      const edge = (Number.isFinite(a) ? a * pa : 0) - (Number.isFinite(b) ? b * pb : 0);
      return {
        mean: prior.mean + prior.sd * shift,
        sd: prior.sd * Math.sqrt(Math.max(0, 1 + edge - shift * shift)),
      };
    }
  }
}

/**
 * The density on a grid, for drawing it: `points` abscissae over the support, or mean ± 4 sd where the support has no
 * end, evenly spaced (in ln x for log-uniform), with the density (not its logarithm) at each.
 */
export function sketchPrior(prior: ScalarPrior, points = 129): { x: Float64Array; density: Float64Array } {
  const [lo, hi] = priorSupport(prior);
  const { mean, sd } = priorMoments(prior);
  const start = Number.isFinite(lo) ? lo : mean - 4 * sd;
  const end = Number.isFinite(hi) ? hi : Math.max(mean, start) + 4 * sd;
  const x = new Float64Array(points);
  const density = new Float64Array(points);
  for (let i = 0; i < points; i += 1) {
    const part = i / (points - 1);
    const value = prior.kind === 'log-uniform' ? start * (end / start) ** part : start + (end - start) * part;
    x[i] = Math.min(end, Math.max(start, value));
    density[i] = Math.exp(lnPriorDensity(prior, x[i]));
  }
  return { x, density };
}

/**
 * Checks one prior against the parameter that it is for and returns the fault, or null. The numbers must make a
 * density (finite, lo < hi, 0 < lo for log-uniform, sd > 0), and its support must lie where the template is defined
 * (an amplitude's range starts at 0). `isotropic` is for mixing angles only.
 */
export function validatePrior(prior: Prior, declaration: ParameterDeclaration): InferenceError | null {
  const path = `priors.${declaration.name}`;
  const invalid = (field: string, message: string, remedy: string): InferenceError =>
    new InferenceError('prior_invalid', `${path}.${field}`, message, remedy);

  if (prior.kind === 'isotropic') {
    if (declaration.role === 'angle') return null;
    return new InferenceError(
      'prior_not_allowed',
      `${path}.kind`,
      `the prior of ${declaration.name} is isotropic, but ${declaration.name} is not a mixing angle`,
      'give it a uniform or normal prior',
    );
  }
  for (const [field, value] of Object.entries(prior)) {
    if (field !== 'kind' && !Number.isFinite(value)) {
      return invalid(
        field,
        `${field} of the prior of ${declaration.name} is not a finite number`,
        'give a finite number',
      );
    }
  }
  if ('lo' in prior && !(prior.lo < prior.hi)) {
    const message = `the prior of ${declaration.name} has lo ${prior.lo} and hi ${prior.hi}: lo must be below hi`;
    return invalid('lo', message, 'swap or change the two bounds');
  }
  if (prior.kind === 'log-uniform' && !(prior.lo > 0)) {
    const message = `the log-uniform prior of ${declaration.name} has lo ${prior.lo}: it must be above 0`;
    return invalid('lo', message, 'raise lo above 0, or use a uniform prior');
  }
  if ('sd' in prior && !(prior.sd > 0)) {
    return invalid(
      'sd',
      `the prior of ${declaration.name} has sd ${prior.sd}: it must be above 0`,
      'give a positive sd',
    );
  }
  if (prior.kind === 'truncated-normal') {
    const a = (prior.lo - prior.mean) / prior.sd;
    const b = (prior.hi - prior.mean) / prior.sd;
    if (Math.min(Math.abs(a), Math.abs(b)) > 30 && a * b > 0) {
      const message = `the bounds of the prior of ${declaration.name} are more than 30 sd away from its mean`;
      return invalid('mean', message, 'move the mean towards the bounds, or use a uniform prior');
    }
  }
  return outsideRange(prior, declaration, path);
}

/** The fault of a prior (or fixed value) that reaches outside the declaration's range, or null. */
function outsideRange(
  prior: ScalarPrior | { kind: 'fixed'; value: number },
  declaration: ParameterDeclaration,
  path: string,
): InferenceError | null {
  const [from, to] = declaration.range;
  const [lo, hi] = prior.kind === 'fixed' ? [prior.value, prior.value] : priorSupport(prior);
  const onOpenEnd = prior.kind === 'fixed' && declaration.exclusiveMinimum === true && prior.value === from;
  if (lo >= from && hi <= to && !onOpenEnd) return null;
  const field = prior.kind === 'fixed' ? 'value' : lo < from ? 'lo' : 'hi';
  const range = `${declaration.exclusiveMinimum === true ? 'above ' : ''}${showBound(from)} to ${showBound(to)}`;
  const what =
    prior.kind === 'fixed'
      ? `the fixed value ${prior.value}`
      : `the prior from ${showBound(lo)} to ${showBound(hi)}`;
  const remedy =
    prior.kind === 'normal' || prior.kind === 'half-normal'
      ? `use a truncated-normal prior with bounds within ${range}`
      : `keep it within ${range}`;
  return new InferenceError(
    'prior_outside_range',
    `${path}.${field}`,
    `${what} of ${declaration.name} reaches outside ${range}, where the template is defined`,
    remedy,
  );
}

function showBound(value: number): string {
  return Number.isFinite(value) ? String(Number(value.toPrecision(6))) : value < 0 ? '−∞' : '∞';
}
