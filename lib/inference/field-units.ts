import { mixingWeights } from '@/lib/templates';
import type { ParameterLayout } from './parameter-layout';

/**
 * What a field of weight 1 contributes for a coupling of 1: u_i = (Re C, −Im C), or (|C|, 0) at a free phase of 0, read from the
 * template's own coefficients at g = 1 and angles at which every weight is there. Keeps the last answer.
 */
export class FieldUnits {
  /** Two numbers a field. */
  readonly values: Float64Array;
  private readonly probe: Float64Array;
  private readonly coefficients: Float64Array;
  private readonly weights: Float64Array;
  private readonly seen: Float64Array;
  private readonly watched: number[];

  constructor(private readonly layout: ParameterLayout) {
    const { template } = layout;
    const fields = layout.masses.length;
    this.values = new Float64Array(2 * fields);
    this.probe = Float64Array.from(layout.base);
    this.coefficients = new Float64Array(template.columnCount);
    // Angles of about equal weights: any at which no weight vanishes would do.
    const angles = Float64Array.from(layout.angles, () => Math.PI / 4);
    this.weights = mixingWeights(angles);
    layout.angles.forEach((index, k) => (this.probe[index] = angles[k]));
    this.watched = template.parameters.flatMap(({ role }, index) =>
      role === 'mass' || role === 'vertex-angle' ? [index] : [],
    );
    this.seen = new Float64Array(this.watched.length).fill(NaN);
  }

  /** Settles `values` for the masses (and vertex angle) in `full`; no allocation. */
  update(full: Float64Array): Float64Array {
    const { watched, seen, probe } = this;
    let same = true;
    for (let k = 0; k < watched.length; k += 1) {
      if (full[watched[k]] !== seen[k]) same = false;
      seen[k] = full[watched[k]];
      probe[watched[k]] = seen[k];
    }
    if (same) return this.values;
    probe[this.layout.coupling] = 1;
    this.layout.template.coefficients(probe, this.coefficients);
    for (let j = 0; j < this.values.length; j += 1) {
      this.values[j] = this.coefficients[j] / this.weights[Math.floor(j / 2)];
    }
    return this.values;
  }
}
