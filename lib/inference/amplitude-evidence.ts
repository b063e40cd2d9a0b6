import { unitAmplitudeVariance } from './amplitude-maps';
import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldSystem, MassEvidence } from './field-system';
import { FieldUnits } from './field-units';
import type { ParameterLayout } from './parameter-layout';

/**
 * Evidence of the masses for three or more mixed fields, where a grid of all angles would cost too much for every mass: the
 * amplitudes g w_i count as independent normal coefficients of u_i, of either sign, with the variance that the priors of g and
 * the weights give.
 */
export class AmplitudeEvidence implements MassEvidence {
  private readonly units: FieldUnits;
  private readonly variance: Float64Array;
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;
  private readonly logReference: number;

  constructor(layout: ParameterLayout) {
    const fields = layout.masses.length;
    this.units = new FieldUnits(layout);
    this.variance = unitAmplitudeVariance(layout).map((half) => 2 * half);
    this.logReference = this.variance.reduce((sum, value) => sum + Math.log(value), 0);
    this.factor = new Float64Array(fields * fields);
    this.rest = new Float64Array(fields);
  }

  logEvidence(system: FieldSystem, full: Float64Array): number {
    const { factor, rest, variance } = this;
    const fields = variance.length;
    const n = system.size;
    const u = this.units.of(system, full);
    for (let i = 0; i < fields; i += 1) {
      rest[i] = u[2 * i] * system.linear[2 * i] + u[2 * i + 1] * system.linear[2 * i + 1];
      for (let j = 0; j <= i; j += 1) {
        const at = 2 * i * n + 2 * j;
        factor[i * fields + j] =
          u[2 * i] * (system.gram[at] * u[2 * j] + system.gram[at + 1] * u[2 * j + 1]) +
          u[2 * i + 1] * (system.gram[at + n] * u[2 * j] + system.gram[at + n + 1] * u[2 * j + 1]);
      }
      factor[i * fields + i] += 1 / variance[i];
    }
    choleskyInto(factor, fields, factor);
    forwardSolve(factor, fields, rest);
    let gain = 0;
    for (let j = 0; j < fields; j += 1) gain += rest[j] * rest[j];
    return system.model.logEvidence(-gain, logDeterminant(factor, fields) + this.logReference);
  }
}
