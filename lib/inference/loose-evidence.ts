import { unitAmplitudeVariance } from './amplitude-maps';
import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldSystem, MassEvidence } from './field-system';
import { FieldUnits } from './field-units';
import type { ParameterLayout } from './parameter-layout';

/**
 * Evidence of the masses for a mixture of vertices whose angle α is sampled: a jump keeps α, but the masses' grid is laid once
 * for all α. The phases, which α turns, are left free: coefficients of every field normal with mean 0 and the variance that
 * the priors of g and the weights give at the mean of |C|² over α = ±π/4.
 */
export class LooseEvidence implements MassEvidence {
  private readonly units: FieldUnits;
  private readonly unitVariance: Float64Array;
  private readonly variance: Float64Array;
  private readonly probe: Float64Array;
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;

  constructor(
    private readonly layout: ParameterLayout,
    private readonly vertexAngle: number,
  ) {
    const size = 2 * layout.masses.length;
    this.units = new FieldUnits(layout);
    this.unitVariance = unitAmplitudeVariance(layout);
    this.variance = new Float64Array(layout.masses.length);
    this.probe = Float64Array.from(layout.base);
    this.factor = new Float64Array(size * size);
    this.rest = new Float64Array(size);
  }

  logEvidence(system: FieldSystem, full: Float64Array): number {
    const { layout, probe, variance, factor, rest } = this;
    const n = system.size;
    for (const index of layout.masses) probe[index] = full[index];
    variance.fill(0);
    for (const angle of [-Math.PI / 4, Math.PI / 4]) {
      probe[this.vertexAngle] = angle;
      const u = this.units.update(probe);
      for (let f = 0; f < variance.length; f += 1) {
        variance[f] += 0.5 * this.unitVariance[f] * (u[2 * f] ** 2 + u[2 * f + 1] ** 2);
      }
    }
    factor.set(system.gram);
    rest.set(system.linear);
    let logReference = 0;
    for (let j = 0; j < n; j += 1) {
      factor[j * n + j] += 1 / variance[j >> 1];
      logReference += Math.log(variance[j >> 1]);
    }
    choleskyInto(factor, n, factor);
    forwardSolve(factor, n, rest);
    let gain = 0;
    for (let j = 0; j < n; j += 1) gain += rest[j] * rest[j];
    return system.model.logEvidence(-gain, logDeterminant(factor, n) + logReference);
  }
}
