import { drawIsotropicAngles, logIsotropicDensity, mixingWeights } from '@/lib/templates';
import type { Rng, Target } from '@/lib/sampler';
import { FieldUnits } from './field-units';
import type { Metric } from './metric';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { drawFromPrior, lnPriorDensity, type ScalarPrior } from './priors';
import type { WhitenedField } from './whitened-field';
import type { Whitening } from './whitening';

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
  { whitening, parts }: Pick<Metric, 'whitening' | 'parts'>,
  fields: readonly WhitenedField[],
  background: Float64Array,
): ChiSquares {
  const p = whitening.length;
  const byPart = new Float64Array(parts.length);
  const { template, masses } = layout;
  const coefficients = new Float64Array(template.columnCount);
  const residual = new Float64Array(p);
  const fixedCount = template.fixedColumns.length;
  const write = buildCoefficients(layout);
  const total = (full: Float64Array): number => {
    write(full, coefficients);
    residual.set(whitening.data);
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
      for (let i = 0; i < p; i += 1) residual[i] -= c * background[j * p + i];
    }
    let all = 0;
    for (let k = 0; k < parts.length; k += 1) {
      let sum = 0;
      for (let i = parts[k].from; i < parts[k].to; i += 1) sum += residual[i] * residual[i];
      byPart[k] = sum;
      all += sum;
    }
    return all;
  };
  return { total, byPart };
}

/**
 * ln prior of a full parameter vector: Σ ln p_i, the ordered masses divided by Z, the isotropic angles as one density.
 * −Infinity outside the support; NaN parameters give −Infinity.
 */
export function buildLogPrior(layout: ParameterLayout): (full: Float64Array) => number {
  const scalars: { index: number; prior: ScalarPrior; constant: number }[] = [];
  for (const index of layout.free) {
    const prior = scalarPriorOf(layout, index);
    if (!prior) continue;
    // The constant of a truncated normal takes two tail probabilities: take it once, at the mean of the bounds.
    const inside = prior.kind === 'truncated-normal' ? Math.min(prior.hi, Math.max(prior.lo, prior.mean)) : 0;
    const constant =
      prior.kind === 'truncated-normal'
        ? lnPriorDensity(prior, inside) + 0.5 * ((inside - prior.mean) / prior.sd) ** 2
        : 0;
    scalars.push({ index, prior, constant });
  }
  const angles = new Float64Array(layout.angles.length);
  const { masses, massOrder } = layout;
  let read: Float64Array;
  const massOf = (f: number): number => read[masses[f]];
  return (full) => {
    let sum = -layout.logOrderProbability;
    read = full;
    if (!massOrder.holds(massOf)) return -Infinity;
    for (let i = 0; i < scalars.length; i += 1) {
      const { index, prior, constant } = scalars[i];
      const x = full[index];
      if (prior.kind === 'truncated-normal') {
        if (!(x >= prior.lo && x <= prior.hi)) return -Infinity;
        const z = (x - prior.mean) / prior.sd;
        sum += constant - 0.5 * z * z;
      } else {
        sum += lnPriorDensity(prior, x);
      }
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
export function buildTarget(layout: ParameterLayout, metric: Metric, chiSquares: ChiSquares): Target {
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
