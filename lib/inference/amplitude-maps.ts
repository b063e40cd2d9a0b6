import { anglesFromWeights, anglesJacobian, mixingWeights } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import type { FieldSystem } from './field-system';
import { FieldUnits } from './field-units';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import type { AmplitudePrior } from './polar-pair';
import { lnPriorDensity, priorMoments, priorSupport, type ScalarPrior } from './priors';

/** How the parameters of a template make one amplitude A ≥ 0 and one phase φ a field, and back. */
export interface AmplitudeMap {
  /** Prior of each field's amplitude; settled by `prepare`. */
  readonly priors: AmplitudePrior[];
  readonly amplitude: Float64Array;
  readonly phase: Float64Array;
  /** Fields whose amplitude or phase is not drawn. */
  readonly amplitudeHeld: readonly boolean[];
  readonly phaseHeld: readonly boolean[];
  /** True where the priors are the same at all masses, so that `prepare` does nothing. */
  readonly constant: boolean;
  /** Settles the priors at the masses of the system. */
  prepare(system: FieldSystem, full: Float64Array): void;
  /** Before a draw: chooses what is discrete, then reads what is held. */
  begin(rng: Rng, full: Float64Array): void;
  /** Amplitudes and phases of the parameters in `full`. */
  read(full: Float64Array): void;
  /** Writes the parameters that `amplitude` and `phase` make. */
  write(full: Float64Array): void;
  /** ln |∂(amplitudes, phases)/∂(parameters)|, with the probability of the discrete choice. */
  lnJacobian(full: Float64Array): number;
  /** ln prior density of the drawn amplitudes (of all at once), for the shape of the mass proposal. */
  lnAmplitudePrior(amplitudes: Float64Array): number;
}

/** Brings a phase into (−π, π]. */
function wrapPhase(phase: number): number {
  const turned = phase - 2 * Math.PI * Math.round(phase / (2 * Math.PI));
  return turned <= -Math.PI ? Math.PI : turned;
}

/** ½ E[A²] of a prior. */
function halfSquare(prior: ScalarPrior): number {
  const { mean, sd } = priorMoments(prior);
  return 0.5 * (mean * mean + sd * sd);
}

/**
 * ½ E[g²] E[w_i²] for every field: the variance of A cos φ and of A sin φ for a field with |C| = 1. Fixed g and angles count
 * as they are; sampled angles as an isotropic direction, for which w is Dirichlet(½, …, ½) and E[w²] = 3/(N(N + 2)).
 */
export function unitAmplitudeVariance(layout: ParameterLayout): Float64Array {
  const { base, coupling, position } = layout;
  const coupled = scalarPriorOf(layout, coupling);
  const half = coupled ? halfSquare(coupled) : 0.5 * base[coupling] ** 2;
  const fields = layout.masses.length;
  const fixed = layout.angles.every((index) => position[index] < 0);
  const weights = mixingWeights(Float64Array.from(layout.angles, (index) => base[index]));
  return weights.map((w) => Math.max(1e-12, half * (fixed ? w * w : 3 / (fields * (fields + 2)))));
}

/** Normal factor of a scalar prior; flat for those without one. */
function normalFactor(prior: ScalarPrior): { ownMean: number; ownPrecision: number } {
  if (prior.kind === 'half-normal') return { ownMean: 0, ownPrecision: 1 / prior.sd ** 2 };
  if ('mean' in prior) return { ownMean: prior.mean, ownPrecision: 1 / prior.sd ** 2 };
  return { ownMean: 0, ownPrecision: 0 };
}

/** Structure `polar`: A_i and φ_i are parameters. */
export function polarAmplitudes(layout: ParameterLayout): AmplitudeMap {
  const fields = layout.masses.length;
  const { amplitudes, phases, position } = layout;
  const scalar = amplitudes.map((index) => scalarPriorOf(layout, index));
  const priors = scalar.map<AmplitudePrior>((prior, f) => {
    if (!prior) {
      const held = layout.base[amplitudes[f]];
      return {
        lo: 0,
        hi: Infinity,
        ownMean: 0,
        ownPrecision: 0,
        power: 0,
        variance: Math.max(0.5 * held * held, 1e-12),
      };
    }
    const [lo, hi] = priorSupport(prior);
    return {
      lo,
      hi,
      ...normalFactor(prior),
      power: prior.kind === 'log-uniform' ? -1 : 0,
      variance: halfSquare(prior),
    };
  });
  const amplitude = new Float64Array(fields);
  const phase = new Float64Array(fields);
  const read = (full: Float64Array): void => {
    for (let f = 0; f < fields; f += 1) {
      amplitude[f] = full[amplitudes[f]];
      phase[f] = full[phases[f]];
    }
  };
  return {
    priors,
    amplitude,
    phase,
    amplitudeHeld: amplitudes.map((index) => position[index] < 0),
    phaseHeld: phases.map((index) => position[index] < 0),
    constant: true,
    prepare: () => undefined,
    begin: (_, full) => read(full),
    read,
    write(full) {
      for (let f = 0; f < fields; f += 1) {
        full[amplitudes[f]] = amplitude[f];
        full[phases[f]] = phase[f];
      }
    },
    lnJacobian: () => 0,
    lnAmplitudePrior(at) {
      let sum = 0;
      for (let f = 0; f < fields; f += 1) {
        const prior = scalar[f];
        if (prior) sum += lnPriorDensity(prior, Math.min(priors[f].hi, Math.max(priors[f].lo, at[f])));
      }
      return sum;
    },
  };
}

/**
 * Structure `mixed-polar`: A_i = |g| w_i(angles) |C(μ_i)|, and a negative g turns every phase by π. With g and all angles
 * sampled the amplitudes are drawn freely and give g = ± Σ A_i/|C_i|, w_i = A_i/(|C_i| |g|), with
 * |∂A/∂(g, angles)| = |g|^{N−1} Π |C_i| |∂w/∂angles|; the sign of g is a coin. Else the amplitudes are held.
 */
export function mixedAmplitudes(layout: ParameterLayout): AmplitudeMap {
  const fields = layout.masses.length;
  const { angles, coupling, phases, position } = layout;
  const units = new FieldUnits(layout);
  const coupled = scalarPriorOf(layout, coupling);
  const free = coupled !== null && angles.every((index) => position[index] >= 0);
  const amplitude = new Float64Array(fields);
  const phase = new Float64Array(fields);
  const modulus = new Float64Array(fields);
  const weights = new Float64Array(fields);
  const angleValues = new Float64Array(angles.length);
  const [lo, hi] = coupled ? priorSupport(coupled) : [-Infinity, Infinity];
  const unitVariance = unitAmplitudeVariance(layout);
  const square = coupled ? 2 * halfSquare(coupled) : 0;
  const priors = Array.from({ length: fields }, () => ({
    lo: 0,
    hi: Infinity,
    ownMean: 0,
    ownPrecision: 0,
    power: fields > 1 ? -0.5 : 0,
    variance: 1,
  }));
  const normal = coupled !== null && 'sd' in coupled;
  const oneSign = lo >= 0 ? 1 : hi <= 0 ? -1 : 0;
  let sign = 1;

  const weigh = (full: Float64Array): void => {
    for (let k = 0; k < angles.length; k += 1) angleValues[k] = full[angles[k]];
    mixingWeights(angleValues, weights);
  };
  const readAt = (full: Float64Array): void => {
    weigh(full);
    const strength = Math.abs(full[coupling]);
    for (let f = 0; f < fields; f += 1) {
      amplitude[f] = strength * weights[f] * modulus[f];
      phase[f] = full[phases[f]] + (sign < 0 ? Math.PI : 0);
    }
  };
  return {
    priors,
    amplitude,
    phase,
    amplitudeHeld: priors.map(() => !free),
    phaseHeld: phases.map((index) => position[index] < 0),
    constant: false,
    prepare(system, full) {
      const values = units.of(system, full);
      for (let f = 0; f < fields; f += 1) {
        modulus[f] = Math.hypot(values[2 * f], values[2 * f + 1]);
        const scale = modulus[f] * modulus[f];
        priors[f].variance = scale * unitVariance[f];
        if (!free) continue;
        priors[f].hi = modulus[f] * Math.max(Math.abs(lo), Math.abs(hi));
        priors[f].ownPrecision = normal ? 1 / (scale * square) : 0;
      }
    },
    begin(rng, full) {
      if (free) sign = oneSign !== 0 ? oneSign : rng.uniform() < 0.5 ? 1 : -1;
      else sign = full[coupling] < 0 ? -1 : 1;
      readAt(full);
    },
    read(full) {
      sign = full[coupling] < 0 ? -1 : 1;
      readAt(full);
    },
    write(full) {
      const turn = sign < 0 ? Math.PI : 0;
      for (let f = 0; f < fields; f += 1) {
        if (position[phases[f]] >= 0) full[phases[f]] = wrapPhase(phase[f] - turn);
      }
      if (!free) return;
      let strength = 0;
      for (let f = 0; f < fields; f += 1) {
        weights[f] = amplitude[f] / modulus[f];
        strength += weights[f];
      }
      full[coupling] = sign * strength;
      for (let f = 0; f < fields; f += 1) weights[f] /= strength;
      anglesFromWeights(weights, angleValues);
      for (let k = 0; k < angles.length; k += 1) full[angles[k]] = angleValues[k];
    },
    lnJacobian(full) {
      if (!free) return 0;
      for (let k = 0; k < angles.length; k += 1) angleValues[k] = full[angles[k]];
      let sum = Math.log(anglesJacobian(angleValues)) + (fields - 1) * Math.log(Math.abs(full[coupling]));
      for (let f = 0; f < fields; f += 1) sum += Math.log(modulus[f]);
      return oneSign === 0 ? sum - Math.LN2 : sum;
    },
    lnAmplitudePrior(at) {
      if (!free || !coupled) return 0;
      let strength = 0;
      for (let f = 0; f < fields; f += 1) strength += at[f] / modulus[f];
      const inside = Math.min(Math.max(Math.abs(lo), Math.abs(hi)), strength);
      // Either sign of g may do; the Dirichlet(½, …, ½) density of the weights; the Jacobian of the map.
      let sum = Math.max(-1e3, lnPriorDensity(coupled, inside), lnPriorDensity(coupled, -inside));
      sum -= (fields - 1) * Math.log(strength);
      for (let f = 0; f < fields; f += 1) {
        if (fields > 1) sum -= 0.5 * Math.log(at[f] / (modulus[f] * strength));
        sum -= Math.log(modulus[f]);
      }
      return sum;
    },
  };
}
