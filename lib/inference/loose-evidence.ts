import { unitAmplitudeVariance } from './amplitude-maps';
import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldSystem, MassEvidence } from './field-system';
import { FieldUnits } from './field-units';
import type { ParameterLayout } from './parameter-layout';

/**
 * Evidence of the masses of mixed fields with every phase left free: coefficients of every field normal with mean 0 and the
 * variance that the priors of g and the weights give. Locked phases make the evidence's peaks narrow; this one is broad
 * round all of them, so that a grid refined by it too doesn't step over any. Where the angle α of a mixture of vertices is
 * sampled, |C|² is the mean over α = ±π/4.
 */
export class LooseEvidence implements MassEvidence {
  private readonly units: FieldUnits;
  private readonly unitVariance: Float64Array;
  private readonly variance: Float64Array;
  private readonly probe: Float64Array;
  private readonly vertexAngles: readonly number[];
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;

  constructor(private readonly layout: ParameterLayout) {
    const size = 2 * layout.masses.length;
    const { vertexAngle, position, base } = layout;
    this.units = new FieldUnits(layout);
    this.unitVariance = unitAmplitudeVariance(layout);
    this.variance = new Float64Array(layout.masses.length);
    this.probe = Float64Array.from(base);
    if (vertexAngle < 0) this.vertexAngles = [0];
    else this.vertexAngles = position[vertexAngle] >= 0 ? [-Math.PI / 4, Math.PI / 4] : [base[vertexAngle]];
    this.factor = new Float64Array(size * size);
    this.rest = new Float64Array(size);
  }

  logEvidence(system: FieldSystem): number {
    const { layout, probe, variance, factor, rest, vertexAngles } = this;
    const n = system.size;
    variance.fill(0);
    for (const angle of vertexAngles) {
      if (layout.vertexAngle >= 0) probe[layout.vertexAngle] = angle;
      const u = this.units.of(system, probe);
      for (let f = 0; f < variance.length; f += 1) {
        const square = u[2 * f] * u[2 * f] + u[2 * f + 1] * u[2 * f + 1];
        variance[f] += (this.unitVariance[f] * square) / vertexAngles.length;
      }
    }
    factor.set(system.gram);
    rest.set(system.linear);
    let reference = 1;
    for (let j = 0; j < n; j += 1) {
      factor[j * n + j] += 1 / variance[j >> 1];
      reference *= variance[j >> 1];
    }
    choleskyInto(factor, n, factor);
    forwardSolve(factor, n, rest);
    let gain = 0;
    for (let j = 0; j < n; j += 1) gain += rest[j] * rest[j];
    return system.model.logEvidence(-gain, logDeterminant(factor, n) + Math.log(reference));
  }
}
