import type { Rng } from '@/lib/sampler';
import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import type { FieldStage, FieldSystem } from './field-system';
import {
  drawCoefficient,
  isExactReference,
  linearReference,
  lnCoefficientDensity,
  type LinearReference,
} from './linear-reference';
import type { ParameterLayout } from './parameter-layout';

/**
 * Structure `linear`: the fields' cosine and sine amplitudes are coefficients themselves. Given the masses they are drawn
 * one after the other from their conditional normals (exact for normal priors and likelihood); fixed ones are conditioned on.
 */
export class QuadratureStage implements FieldStage {
  readonly exact: boolean;
  /** Parameter index of every column. */
  private readonly indices: number[];
  /** Columns whose coefficient is sampled. */
  private readonly free: number[];
  private readonly references: LinearReference[];
  private readonly priorLogDeterminant: number;
  private readonly priorQuadratic: number;
  private readonly factor: Float64Array;
  private readonly rest: Float64Array;

  constructor(private readonly layout: ParameterLayout) {
    this.indices = layout.quadratures.flatMap(([cosine, sine]) => [cosine, sine]);
    this.free = this.indices.flatMap((index, column) => (layout.position[index] >= 0 ? [column] : []));
    this.references = this.free.map((column) => linearReference(layout.priors[this.indices[column]]));
    this.priorLogDeterminant = this.references.reduce((sum, { precision }) => sum - Math.log(precision), 0);
    this.priorQuadratic = this.references.reduce(
      (sum, { precision, mean }) => sum + precision * mean * mean,
      0,
    );
    this.factor = new Float64Array(this.free.length ** 2);
    this.rest = new Float64Array(this.free.length);
    this.exact = [...this.indices, ...layout.background].every((index) =>
      isExactReference(layout.priors[index]),
    );
  }

  logEvidence(system: FieldSystem): number {
    const fixed = this.settle(system);
    const n = this.free.length;
    let gain = 0;
    for (let j = 0; j < n; j += 1) gain += this.rest[j] * this.rest[j];
    const quadratic = this.priorQuadratic + fixed - gain;
    return system.model.logEvidence(quadratic, logDeterminant(this.factor, n) + this.priorLogDeterminant);
  }

  draw(rng: Rng, system: FieldSystem, full: Float64Array): void {
    this.settle(system);
    for (let j = this.free.length - 1; j >= 0; j -= 1) {
      const diagonal = this.factor[j * this.free.length + j];
      const linear = diagonal * this.conditional(j, full);
      full[this.indices[this.free[j]]] = drawCoefficient(
        rng,
        this.references[j],
        diagonal * diagonal,
        linear,
      );
    }
  }

  logDensity(system: FieldSystem, full: Float64Array): number {
    this.settle(system);
    let sum = 0;
    for (let j = this.free.length - 1; j >= 0; j -= 1) {
      const diagonal = this.factor[j * this.free.length + j];
      const linear = diagonal * this.conditional(j, full);
      sum += lnCoefficientDensity(
        full[this.indices[this.free[j]]],
        this.references[j],
        diagonal * diagonal,
        linear,
      );
    }
    return sum;
  }

  private conditional(j: number, full: Float64Array): number {
    const n = this.free.length;
    let rest = this.rest[j];
    for (let i = j + 1; i < n; i += 1) rest -= this.factor[i * n + j] * full[this.indices[this.free[i]]];
    return rest;
  }

  /** Factorises P and solves for L⁻¹ rhs; returns what fixed coefficients add to the quadratic form. */
  private settle(system: FieldSystem): number {
    const { free, factor, rest, layout } = this;
    const n = free.length;
    const size = system.size;
    let quadratic = 0;
    for (let j = 0; j < n; j += 1) {
      const { precision, mean } = this.references[j];
      for (let i = 0; i <= j; i += 1) factor[j * n + i] = system.gram[free[j] * size + free[i]];
      factor[j * n + j] += precision;
      rest[j] = system.linear[free[j]] + precision * mean;
    }
    if (n < size) {
      for (let column = 0; column < size; column += 1) {
        if (free.includes(column)) continue;
        const value = layout.base[this.indices[column]];
        for (let j = 0; j < n; j += 1) rest[j] -= system.gram[free[j] * size + column] * value;
        quadratic -= 2 * value * system.linear[column];
        for (let other = 0; other < size; other += 1) {
          if (free.includes(other)) continue;
          quadratic += value * system.gram[column * size + other] * layout.base[this.indices[other]];
        }
      }
    }
    choleskyInto(factor, n, factor);
    forwardSolve(factor, n, rest);
    return quadratic;
  }
}
