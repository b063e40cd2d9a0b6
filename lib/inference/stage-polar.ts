import type { Rng } from '@/lib/sampler';
import type { AmplitudeMap } from './amplitude-maps';
import { backwardSolve, choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldStage, FieldSystem } from './field-system';
import { PolarPair } from './polar-pair';

/**
 * Structures `polar` and `mixed-polar`: every field has an amplitude A ≥ 0 and a phase φ. Given the masses, the last field's
 * pair is drawn with the other fields integrated out under normal references of the same variance, then the one before
 * it given that, and so on (`PolarPair`). An `AmplitudeMap` turns parameters into amplitudes and back.
 */
export class PolarStage implements FieldStage {
  readonly exact = false;
  private readonly pairs: PolarPair[];
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;
  private readonly mean: Float64Array;
  private readonly inverse: Float64Array;
  private readonly typical: Float64Array;

  constructor(
    private readonly map: AmplitudeMap,
    fields: number,
  ) {
    const size = 2 * fields;
    this.factor = new Float64Array(size * size);
    this.rest = new Float64Array(size);
    this.mean = new Float64Array(size);
    this.inverse = new Float64Array(size);
    this.typical = new Float64Array(fields);
    this.pairs = Array.from({ length: fields }, () => new PolarPair());
  }

  /**
   * The evidence under the normal references, times prior / reference of each amplitude at its root mean square under the
   * conditional: an approximation that only shapes the proposal.
   */
  logEvidence(system: FieldSystem, full: Float64Array): number {
    const logReference = this.settle(system, full);
    const { factor, rest, mean, inverse, typical, map } = this;
    const n = system.size;
    let gain = 0;
    for (let j = 0; j < n; j += 1) {
      gain += rest[j] * rest[j];
      mean[j] = rest[j];
    }
    backwardSolve(factor, n, mean);
    let correction = 0;
    for (let f = 0; f < typical.length; f += 1) {
      let square = 0;
      let spread = 0;
      for (let j = 2 * f; j < 2 * f + 2; j += 1) {
        inverse.fill(0);
        inverse[j] = 1;
        forwardSolve(factor, n, inverse);
        square += mean[j] * mean[j];
        for (let i = j; i < n; i += 1) spread += inverse[i] * inverse[i];
      }
      const { variance, hi } = map.priors[f];
      const found = Math.sqrt(square + spread);
      // Beyond the amplitude's upper end only the part of the conditional that reaches back inside counts.
      const beyond = Math.max(0, found - hi);
      typical[f] = Math.min(hi, found);
      correction +=
        (0.5 * typical[f] ** 2) / variance + Math.log(variance / typical[f]) - (0.5 * beyond ** 2) / spread;
    }
    const evidence = system.model.logEvidence(-gain, logDeterminant(factor, n) + logReference);
    return evidence + correction + map.lnAmplitudePrior(typical);
  }

  draw(rng: Rng, system: FieldSystem, full: Float64Array): void {
    this.settle(system, full);
    const { map } = this;
    map.begin(rng, full);
    for (let f = map.priors.length - 1; f >= 0; f -= 1) {
      const pair = this.condition(system, f);
      if (!map.phaseHeld[f]) map.phase[f] = pair.drawPhase(rng);
      if (!map.amplitudeHeld[f]) map.amplitude[f] = pair.drawAmplitude(rng, map.phase[f]);
    }
    map.write(full);
  }

  logDensity(system: FieldSystem, full: Float64Array): number {
    this.settle(system, full);
    const { map } = this;
    map.read(full);
    let sum = map.lnJacobian(full);
    for (let f = map.priors.length - 1; f >= 0; f -= 1) {
      const pair = this.condition(system, f);
      if (!map.phaseHeld[f]) sum += pair.lnPhaseDensity(map.phase[f]);
      if (!map.amplitudeHeld[f]) sum += pair.lnAmplitudeDensity(map.amplitude[f], map.phase[f]);
    }
    return sum;
  }

  /** Factorises the system under the references; returns their ln |D|. */
  private settle(system: FieldSystem, full: Float64Array): number {
    const { factor, rest, map } = this;
    const n = system.size;
    map.prepare(system, full);
    factor.set(system.gram);
    rest.set(system.linear);
    let logReference = 0;
    for (let j = 0; j < n; j += 1) {
      const { variance } = map.priors[j >> 1];
      factor[j * n + j] += 1 / variance;
      logReference += Math.log(variance);
    }
    choleskyInto(factor, n, factor);
    forwardSolve(factor, n, rest);
    return logReference;
  }

  /** Gives the pair of field f its conditional, later fields at their values, the field's own reference taken out. */
  private condition(system: FieldSystem, f: number): PolarPair {
    const { factor, rest, map } = this;
    const pair = this.pairs[f];
    const n = system.size;
    const j = 2 * f;
    let r0 = rest[j];
    let r1 = rest[j + 1];
    for (let g = f + 1; g < map.priors.length; g += 1) {
      const a = map.amplitude[g] * Math.cos(map.phase[g]);
      const b = -map.amplitude[g] * Math.sin(map.phase[g]);
      r0 -= factor[2 * g * n + j] * a + factor[(2 * g + 1) * n + j] * b;
      r1 -= factor[2 * g * n + j + 1] * a + factor[(2 * g + 1) * n + j + 1] * b;
    }
    const l00 = factor[j * n + j];
    const l10 = factor[(j + 1) * n + j];
    const l11 = factor[(j + 1) * n + j + 1];
    const own = 1 / map.priors[f].variance;
    pair.settle(
      Math.max(0, l00 * l00 - own),
      l00 * l10,
      Math.max(0, l10 * l10 + l11 * l11 - own),
      l00 * r0,
      l10 * r0 + l11 * r1,
      map.priors[f],
      map.amplitudeHeld[f] ? map.amplitude[f] : NaN,
    );
    return pair;
  }
}
