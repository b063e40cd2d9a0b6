import type { Rng } from '@/lib/sampler';
import type { AmplitudeMap } from './amplitude-maps';
import { backwardSolve, choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldStage, FieldSystem } from './field-system';
import { PolarPair } from './polar-pair';

/** How far the root mean square of an amplitude lies below its prior's before its reference is the prior's alone: at this part of its square. */
const PRIOR_ALONE = 0.5;
/** Least precision of a reference, in those of the prior's: keeps masses that coincide apart. */
const LEAST = 1e-3;
/** Most that the density's pole at A = 0 adds to the precision, in those of the conditional. */
const NARROWEST = 3;

/** The normal that stands in for one field's prior in (A cos φ, −A sin φ): exp(−½ cᵀRc + rᵀc). */
interface Site {
  raa: number;
  rab: number;
  rbb: number;
  ra: number;
  rb: number;
}

/**
 * Structures `polar` and `mixed-polar`: every field has an amplitude A ≥ 0 and a phase φ. Given the masses, the background
 * coefficients that the data hardly know are drawn first, then the last field's pair with the other fields integrated out under
 * normal references, then the one before it given that, and so on (`PolarPair`). An `AmplitudeMap` turns parameters into amplitudes
 * and back.
 *
 * The reference of a field begins as the normal of the prior's own variance. Where the data say more of the amplitude than the prior,
 * it becomes the expansion of the prior's density in the plane, A^(power − 1), round the conditional's mean: a tilt along the mean and
 * a curvature across it.
 */
export class PolarStage implements FieldStage {
  readonly exact = false;
  private readonly pairs: PolarPair[];
  private readonly sites: Site[];
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;
  private readonly mean: Float64Array;
  private readonly inverse: Float64Array;
  private readonly typical: Float64Array;
  private readonly spread: Float64Array;
  private readonly joint: Float64Array;
  private readonly jointRest: Float64Array;
  private readonly jointMean: Float64Array;
  // What the joint system was last made of.
  private joined: FieldSystem | null = null;
  private joinedVersion = -1;

  constructor(
    private readonly map: AmplitudeMap,
    fields: number,
    private readonly first: number,
  ) {
    const size = 2 * fields;
    this.factor = new Float64Array(size * size);
    this.rest = new Float64Array(size);
    this.mean = new Float64Array(size);
    this.inverse = new Float64Array(size);
    this.typical = new Float64Array(fields);
    this.spread = new Float64Array(fields);
    this.pairs = Array.from({ length: fields }, () => new PolarPair());
    this.sites = Array.from({ length: fields }, () => ({ raa: 0, rab: 0, rbb: 0, ra: 0, rb: 0 }));
    this.joint = new Float64Array((size + first) ** 2);
    this.jointRest = new Float64Array(size + first);
    this.jointMean = new Float64Array(size + first);
  }

  /**
   * The evidence under the normal references, times prior / reference of each amplitude at its root mean square under the
   * conditional, and of the background drawn first, up to a constant: an approximation that only shapes the proposal.
   */
  logEvidence(system: FieldSystem, full: Float64Array): number {
    this.join(system, full);
    const { joint, jointRest, jointMean, sites, spread, typical, map } = this;
    const size = jointRest.length;
    let gain = 0;
    for (let j = 0; j < size; j += 1) gain += jointRest[j] * jointRest[j];
    jointMean.set(jointRest);
    backwardSolve(joint, size, jointMean);
    let correction = system.model.firstCorrection(joint, jointRest, jointMean);
    for (let f = 0; f < typical.length; f += 1) {
      const { hi } = map.priors[f];
      const [a, b] = [jointMean[2 * f], jointMean[2 * f + 1]];
      const square = a * a + b * b;
      const found = Math.sqrt(square + spread[f]);
      // Beyond the amplitude's upper end only the part of the conditional that reaches back inside counts.
      const beyond = Math.max(0, found - hi);
      typical[f] = Math.min(hi, found);
      const { raa, rab, rbb, ra, rb } = sites[f];
      const shrunk = (typical[f] / found) ** 2;
      const bent = raa * a * a + 2 * rab * a * b + rbb * b * b + 0.5 * (raa + rbb) * spread[f];
      correction +=
        0.5 * bent * shrunk - ra * a - rb * b - Math.log(typical[f]) - (0.5 * beyond ** 2) / spread[f];
    }
    const evidence = system.model.logEvidence(
      system.model.firstQuadratic - gain,
      logDeterminant(joint, size) - system.model.firstLogDeterminant,
    );
    return evidence + correction + map.lnAmplitudePrior(typical);
  }

  draw(rng: Rng, system: FieldSystem, full: Float64Array): void {
    this.join(system, full);
    const { map, joint, jointRest } = this;
    system.model.drawFirst(rng, joint, jointRest, full);
    map.begin(rng, full);
    for (let f = map.priors.length - 1; f >= 0; f -= 1) {
      const pair = this.condition(system, f, full);
      if (!map.phaseHeld[f]) map.phase[f] = pair.drawPhase(rng);
      if (!map.amplitudeHeld[f]) map.amplitude[f] = pair.drawAmplitude(rng, map.phase[f]);
    }
    map.write(full);
  }

  logDensity(system: FieldSystem, full: Float64Array): number {
    this.join(system, full);
    const { map, joint, jointRest } = this;
    map.read(full);
    let sum = map.lnJacobian(full) + system.model.lnFirstDensity(joint, jointRest, full);
    for (let f = map.priors.length - 1; f >= 0; f -= 1) {
      const pair = this.condition(system, f, full);
      if (!map.phaseHeld[f]) sum += pair.lnPhaseDensity(map.phase[f]);
      if (!map.amplitudeHeld[f]) sum += pair.lnAmplitudeDensity(map.amplitude[f], map.phase[f]);
    }
    return sum;
  }

  /** Factorises the system under the prior's own references. */
  private settle(system: FieldSystem, full: Float64Array): void {
    const { factor, rest, map } = this;
    const n = system.size;
    map.prepare(system, full);
    factor.set(system.gram);
    rest.set(system.linear);
    for (let j = 0; j < n; j += 1) factor[j * n + j] += 1 / map.priors[j >> 1].variance;
    choleskyInto(factor, n, factor);
    forwardSolve(factor, n, rest);
  }

  /** Mean of every pair under the settled system, root mean square of its length (`typical`), sum of its variances (`spread`). */
  private look(n: number): void {
    const { factor, rest, mean, inverse, typical, spread } = this;
    mean.set(rest);
    backwardSolve(factor, n, mean);
    for (let f = 0; f < typical.length; f += 1) {
      let square = 0;
      let sum = 0;
      for (let j = 2 * f; j < 2 * f + 2; j += 1) {
        inverse.fill(0);
        inverse[j] = 1;
        forwardSolve(factor, n, inverse);
        square += mean[j] * mean[j];
        for (let i = j; i < n; i += 1) sum += inverse[i] * inverse[i];
      }
      typical[f] = Math.sqrt(square + sum);
      spread[f] = sum;
    }
  }

  /** Settles the references at the masses, then factorises fields and the background drawn first together. */
  private join(system: FieldSystem, full: Float64Array): void {
    if (this.map.constant && this.joined === system && this.joinedVersion === system.version) return;
    this.joined = system;
    this.joinedVersion = system.version;
    this.settle(system, full);
    this.look(system.size);
    const { joint, jointRest, sites, first, mean, typical, spread, map } = this;
    const size = system.size + first;
    system.model.joinFirst(system, joint, jointRest);
    for (let f = 0; f < sites.length; f += 1) {
      const { variance, ownPrecision, power } = map.priors[f];
      const square = typical[f] ** 2;
      const free = map.amplitudeHeld[f] || ownPrecision > 0;
      const alone = free ? 1 : Math.min(1, (square / (2 * variance * PRIOR_ALONE)) ** 2);
      const slope = ((1 - power) * (1 - alone)) / square;
      const [a, b] = [mean[2 * f], mean[2 * f + 1]];
      const site = sites[f];
      // Round the middle A^(power − 1) narrows the pair as a precision in every direction does.
      const known = (mean[2 * f] ** 2 + mean[2 * f + 1] ** 2) / square;
      const narrow = (1 - alone) * (1 - known) ** 2 * Math.min(NARROWEST, (1 - power) / (1 + power)) * 2;
      const own = Math.max(LEAST, alone) / variance + narrow / square;
      spread[f] /= 1 + (0.5 * narrow * spread[f]) / square;
      const across = slope / square;
      site.raa = own + across * b * b;
      site.rab = -across * a * b;
      site.rbb = own + across * a * a;
      site.ra = -slope * a;
      site.rb = -slope * b;
      const at = 2 * f * (size + 1);
      joint[at] += site.raa;
      joint[at + 1] += site.rab;
      joint[at + size] += site.rab;
      joint[at + size + 1] += site.rbb;
      jointRest[2 * f] += site.ra;
      jointRest[2 * f + 1] += site.rb;
    }
    choleskyInto(joint, size, joint);
    forwardSolve(joint, size, jointRest);
  }

  /** Gives the pair of field f its conditional, what was drawn before it at its values, the field's own reference taken out. */
  private condition(system: FieldSystem, f: number, full: Float64Array): PolarPair {
    const { joint, jointRest, map, first } = this;
    const pair = this.pairs[f];
    const n = system.size + first;
    const j = 2 * f;
    let r0 = jointRest[j];
    let r1 = jointRest[j + 1];
    for (let g = f + 1; g < map.priors.length; g += 1) {
      const drawn = this.pairs[g];
      drawn.turn(map.phase[g]);
      const a = map.amplitude[g] * drawn.cosine;
      const b = -map.amplitude[g] * drawn.sine;
      r0 -= joint[2 * g * n + j] * a + joint[(2 * g + 1) * n + j] * b;
      r1 -= joint[2 * g * n + j + 1] * a + joint[(2 * g + 1) * n + j + 1] * b;
    }
    for (let k = 0; k < first; k += 1) {
      const c = full[system.model.indices[system.model.count - first + k]];
      const row = (system.size + k) * n + j;
      r0 -= joint[row] * c;
      r1 -= joint[row + 1] * c;
    }
    const l00 = joint[j * n + j];
    const l10 = joint[(j + 1) * n + j];
    const l11 = joint[(j + 1) * n + j + 1];
    const { raa, rab, rbb, ra, rb } = this.sites[f];
    pair.settle(
      Math.max(0, l00 * l00 - raa),
      l00 * l10 - rab,
      Math.max(0, l10 * l10 + l11 * l11 - rbb),
      l00 * r0 - ra,
      l10 * r0 + l11 * r1 - rb,
      map.priors[f],
      map.amplitudeHeld[f] ? map.amplitude[f] : NaN,
    );
    return pair;
  }
}
