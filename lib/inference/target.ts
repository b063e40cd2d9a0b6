import { drawIsotropicAngles, logIsotropicDensity, mixingWeights } from '@/lib/templates';
import type { Rng, Target } from '@/lib/sampler';
import { reachOf } from './compressed';
import { FieldUnits } from './field-units';
import type { Metric } from './metric';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { drawFromPrior, lnPriorDensity, priorSupport, type ScalarPrior } from './priors';
import type { WhitenedField } from './whitened-field';
import type { WhitenedData, Whitening } from './whitening';

/** Background columns, whitened, one after the other (count × p). */
export function whitenBackground(layout: ParameterLayout, whitening: Whitening): Float64Array {
  const p = whitening.length;
  const out = new Float64Array(layout.template.fixedColumns.length * p);
  layout.template.fixedColumns.forEach((column, j) => {
    out.set(column.values, j * p);
    whitening.apply(out, j * p);
  });
  return out;
}

/** Writes the sampled values into the full vector, in which the fixed ones stand already. No allocation. */
export function fillIn(layout: ParameterLayout, x: ArrayLike<number>, full: Float64Array): void {
  const { free } = layout;
  for (let i = 0; i < free.length; i += 1) full[free[i]] = x[i];
}

/**
 * The coefficients of all columns, as the template gives them. For exchange with mixing g w_i u_i(μ_i): the factors u_i, which
 * take Gamma functions, are kept while masses and vertex angle stay.
 */
export function buildCoefficients(layout: ParameterLayout): (full: Float64Array, out: Float64Array) => void {
  const { template, coupling, phases, background } = layout;
  const free = template.structure === 'mixed-polar';
  if (template.structure !== 'mixed' && !free) return (full, out) => template.coefficients(full, out);
  const units = new FieldUnits(layout);
  const fields = layout.masses.length;
  const angles = new Float64Array(layout.angles.length);
  const weights = new Float64Array(fields);
  return (full, out) => {
    const u = units.update(full);
    for (let k = 0; k < angles.length; k += 1) angles[k] = full[layout.angles[k]];
    mixingWeights(angles, weights);
    for (let f = 0; f < fields; f += 1) {
      const strength = full[coupling] * weights[f];
      const phase = free ? full[phases[f]] : 0;
      out[2 * f] = strength * (free ? u[2 * f] * Math.cos(phase) : u[2 * f]);
      out[2 * f + 1] = strength * (free ? -u[2 * f] * Math.sin(phase) : u[2 * f + 1]);
    }
    for (let j = 0; j < background.length; j += 1) out[2 * fields + j] = full[background[j]];
  };
}

/** χ² of a full parameter vector, and that of every part of the data at the vector that it was last asked for. */
export interface ChiSquares {
  total(full: Float64Array): number;
  readonly byPart: Float64Array;
}

/**
 * χ² of a full parameter vector with the covariance as given, from whitened columns: Σ_i (d_i − Σ_j c_j B_ij)².
 * No allocation after construction.
 */
export function buildChiSquare(
  layout: ParameterLayout,
  { whitening, parts }: Pick<Metric<WhitenedData>, 'whitening' | 'parts'>,
  fields: readonly WhitenedField[],
  background: Float64Array,
): ChiSquares {
  const { data } = whitening;
  const p = data.length;
  const bounds = parts.length === 1 ? [{ from: 0, to: p }] : parts;
  const byPart = new Float64Array(parts.length);
  const { template, masses } = layout;
  const reach = reachOf(data, background);
  const coefficients = new Float64Array(template.columnCount);
  const residual = new Float64Array(p);
  const fixedCount = template.fixedColumns.length;
  const write = buildCoefficients(layout);
  const total = (full: Float64Array): number => {
    write(full, coefficients);
    for (let i = 0; i < p; i += 1) residual[i] = data[i];
    let at = 0;
    for (let f = 0; f < fields.length; f += 1) {
      const columns = fields[f].at(full[masses[f]]);
      const { width } = fields[f];
      if (width === 2) {
        const a = coefficients[at];
        const b = coefficients[at + 1];
        for (let i = 0; i < p; i += 1) residual[i] -= a * columns[i] + b * columns[p + i];
      } else {
        for (let c = 0; c < width; c += 1) {
          for (let i = 0; i < p; i += 1) residual[i] -= coefficients[at + c] * columns[c * p + i];
        }
      }
      at += width;
    }
    for (let j = 0; j < fixedCount; j += 1) {
      const c = coefficients[at + j];
      for (let i = 0, row = j * p; i < reach; i += 1, row += 1) residual[i] -= c * background[row];
    }
    let all = 0;
    for (let k = 0; k < bounds.length; k += 1) {
      const { from, to } = bounds[k];
      // Two sums, so that additions don't wait for each other.
      let even = 0;
      let odd = 0;
      for (let i = from + 1; i < to; i += 2) {
        even += residual[i - 1] * residual[i - 1];
        odd += residual[i] * residual[i];
      }
      if ((to - from) % 2 === 1) even += residual[to - 1] * residual[to - 1];
      byPart[k] = even + odd;
      all += byPart[k];
    }
    return all;
  };
  return { total, byPart };
}

/** A scalar prior in the form that costs least: ln density = constant − ½ precision (x − mean)², or constant − ln x, on [lo, hi]. */
interface PriorFactor {
  index: number;
  lo: number;
  hi: number;
  mean: number;
  precision: number;
  logarithmic: boolean;
  constant: number;
}

function factorOf(index: number, prior: ScalarPrior): PriorFactor {
  const [lo, hi] = priorSupport(prior);
  const mean = 'mean' in prior ? prior.mean : 0;
  const precision = 'sd' in prior ? 1 / (prior.sd * prior.sd) : 0;
  const logarithmic = prior.kind === 'log-uniform';
  // The constant is read off the density itself, at the place of its support that is nearest the middle of the normal.
  const inside = logarithmic ? lo : Math.min(hi, Math.max(lo, mean));
  const shape = logarithmic ? -Math.log(inside) : -0.5 * precision * (inside - mean) ** 2;
  return { index, lo, hi, mean, precision, logarithmic, constant: lnPriorDensity(prior, inside) - shape };
}

/**
 * ln prior of a full parameter vector: Σ ln p_i, the ordered masses divided by Z, the isotropic angles as one density.
 * −Infinity outside the support; NaN parameters give −Infinity.
 */
export function buildLogPrior(layout: ParameterLayout): (full: Float64Array) => number {
  const scalars = layout.free.flatMap((index) => {
    const prior = scalarPriorOf(layout, index);
    return prior ? [factorOf(index, prior)] : [];
  });
  const constants = scalars.reduce((sum, { constant }) => sum + constant, -layout.logOrderProbability);
  const angles = new Float64Array(layout.angles.length);
  const { masses, massOrder } = layout;
  let read: Float64Array;
  const massOf = (f: number): number => read[masses[f]];
  return (full) => {
    let sum = constants;
    read = full;
    if (!massOrder.holds(massOf)) return -Infinity;
    for (let i = 0; i < scalars.length; i += 1) {
      const { index, lo, hi, mean, precision, logarithmic } = scalars[i];
      const x = full[index];
      if (!(x >= lo && x <= hi)) return -Infinity;
      if (precision > 0) sum -= 0.5 * precision * (x - mean) * (x - mean);
      else if (logarithmic) sum -= Math.log(x);
    }
    if (layout.isotropic) {
      for (let k = 0; k < angles.length; k += 1) angles[k] = full[layout.angles[k]];
      sum += logIsotropicDensity(angles);
    }
    return sum > -Infinity ? sum : -Infinity;
  };
}

/** One independent draw from the prior, written into the full vector's sampled entries. */
export function buildDrawPrior(layout: ParameterLayout): (rng: Rng, full: Float64Array) => void {
  const { masses } = layout;
  const drawnMasses = new Float64Array(masses.length);
  const angles = new Float64Array(layout.angles.length);
  const others = layout.free.flatMap((index) => {
    const prior = scalarPriorOf(layout, index);
    return prior && !masses.includes(index) ? [{ index, prior }] : [];
  });
  return (rng, full) => {
    if (masses.length > 0) layout.massOrder.draw(rng, drawnMasses);
    for (let f = 0; f < masses.length; f += 1) full[masses[f]] = drawnMasses[f];
    if (layout.isotropic) {
      drawIsotropicAngles(() => rng.uniform(), angles);
      for (let k = 0; k < angles.length; k += 1) full[layout.angles[k]] = angles[k];
    }
    for (const { index, prior } of others) full[index] = drawFromPrior(prior, rng);
  };
}

/** Assembles what the sampler is given. Phases have period 2π. */
export function buildTarget(
  layout: ParameterLayout,
  metric: Pick<Metric, 'logDensity'>,
  chiSquares: ChiSquares,
): Target {
  const { parameters } = layout.template;
  const full = Float64Array.from(layout.base);
  const logPrior = buildLogPrior(layout);
  const drawPrior = buildDrawPrior(layout);
  return {
    names: layout.free.map((index) => parameters[index].name),
    periods: layout.free.map((index) => (parameters[index].circular ? 2 * Math.PI : null)),
    logPrior(x) {
      fillIn(layout, x, full);
      return logPrior(full);
    },
    logLikelihood(x) {
      fillIn(layout, x, full);
      chiSquares.total(full);
      return metric.logDensity(chiSquares.byPart);
    },
    drawPrior(rng, out) {
      drawPrior(rng, full);
      for (let i = 0; i < layout.free.length; i += 1) out[i] = full[layout.free[i]];
    },
  };
}
