import { choleskyInto, forwardSolve } from './cholesky';
import type { LinearModel } from './collapsed';
import { FieldSystem } from './field-system';
import { massRange, type ParameterLayout } from './parameter-layout';

const NODES = 200;
const ROUNDS = 2;

/** Half the fall of λχ² that one field of free amplitude and phase brings at a mass. */
export function singleGain(model: LinearModel, field: number, mass: number): number {
  const { gram, linear } = model.moments(field, mass);
  const ridge = 1e-9 * (gram[0] + gram[2]);
  const determinant = (gram[0] + ridge) * (gram[2] + ridge) - gram[1] * gram[1];
  const [a, b] = linear;
  return (0.5 * (gram[2] * a * a - 2 * gram[1] * a * b + gram[0] * b * b)) / determinant;
}

/**
 * Half the fall of λχ² of all fields together, amplitudes and phases free, at masses found by scanning one field at a
 * time on 200 nodes of its range: first each in turn beside those found before, then all again. It tells roughly how well
 * the template can fit; it is not the best fit.
 */
export function greedyGain(layout: ParameterLayout, model: LinearModel): number {
  const ranges = layout.massPriors.map(massRange);
  const best: number[] = [];
  let gain = 0;
  const scan = (system: FieldSystem, field: number): void => {
    const [lo, hi] = ranges[field];
    gain = -Infinity;
    for (let k = 0; k < (hi > lo ? NODES : 1); k += 1) {
      const mass = hi > lo ? lo + ((hi - lo) * (k + 0.5)) / NODES : lo;
      system.replace(field, model.moments(field, mass));
      const value = systemGain(system);
      if (value > gain) {
        gain = value;
        best[field] = mass;
      }
    }
    system.replace(field, model.moments(field, best[field]));
  };
  for (let count = 1; count <= ranges.length; count += 1) {
    const system = new FieldSystem(model, count);
    system.load((f) => best[f] ?? 0.5 * (ranges[f][0] + ranges[f][1]));
    scan(system, count - 1);
    for (let round = 0; round < ROUNDS && count > 1; round += 1) {
      for (let field = 0; field < count; field += 1) scan(system, field);
    }
  }
  return gain;
}

/** ½ hᵀ G⁻¹ h with a slight ridge, so that equal masses do no harm. */
function systemGain(system: FieldSystem): number {
  const n = system.size;
  const factor = Float64Array.from(system.gram);
  const rest = Float64Array.from(system.linear);
  for (let j = 0; j < n; j += 1) factor[j * n + j] *= 1 + 1e-9;
  if (choleskyInto(factor, n, factor) >= 0) return -Infinity;
  forwardSolve(factor, n, rest);
  return 0.5 * rest.reduce((sum, value) => sum + value * value, 0);
}
