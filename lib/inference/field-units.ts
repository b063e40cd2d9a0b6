import { mixingWeights } from '@/lib/templates';
import type { FieldSystem } from './field-system';
import type { ParameterLayout } from './parameter-layout';

/**
 * What a field of weight 1 contributes for a coupling of 1: u_i = (Re C, −Im C), or (|C|, 0) at a free phase of 0, read from the
 * template's own coefficients at g = 1 and angles at which every weight is there.
 *
 * For a mixture of vertices u is linear in (cos α, sin α), and |C|² a quadratic form in it, so a field's unit at one mass is
 * known for every α from what the template says at two (three) angles; those numbers are kept with the field's moments.
 */
export class FieldUnits {
  /** Two numbers a field. */
  readonly values: Float64Array;
  /** Index of the vertex angle, or −1. */
  readonly vertexAngle: number;
  private readonly probe: Float64Array;
  private readonly coefficients: Float64Array;
  private readonly weights: Float64Array;
  private readonly seen: Float64Array;
  private readonly watched: number[];
  private readonly freePhases: boolean;
  /** Vertex angles at which the template is asked. */
  private readonly probedAngles: readonly number[];

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
    for (const index of layout.phases) if (index >= 0) this.probe[index] = 0;
    this.probe[layout.coupling] = 1;
    this.watched = template.parameters.flatMap(({ role }, index) =>
      role === 'mass' || role === 'vertex-angle' ? [index] : [],
    );
    this.seen = new Float64Array(this.watched.length).fill(NaN);
    this.vertexAngle = layout.vertexAngle;
    this.freePhases = template.structure === 'mixed-polar';
    this.probedAngles =
      this.vertexAngle < 0 ? [0] : this.freePhases ? [0, Math.PI / 2, Math.PI / 4] : [0, Math.PI / 2];
  }

  /** Settles `values` for the masses (and vertex angle) in `full` as the template gives them; no allocation. */
  update(full: Float64Array): Float64Array {
    const { watched, seen, probe } = this;
    let same = true;
    for (let k = 0; k < watched.length; k += 1) {
      if (full[watched[k]] !== seen[k]) same = false;
      seen[k] = full[watched[k]];
      probe[watched[k]] = seen[k];
    }
    if (same) return this.values;
    this.ask();
    return this.values;
  }

  /** Settles `values` for the masses of the system and the vertex angle in `full`; no allocation. */
  of(system: FieldSystem, full: Float64Array): Float64Array {
    const { values, freePhases, vertexAngle } = this;
    const { moments } = system;
    const fields = this.layout.masses.length;
    for (let f = 0; f < fields; f += 1) {
      if (!moments[f].unitKnown) this.learn(system);
    }
    this.seen.fill(NaN);
    if (vertexAngle < 0) {
      for (let f = 0; f < fields; f += 1) {
        values[2 * f] = moments[f].unit[0];
        values[2 * f + 1] = moments[f].unit[1];
      }
      return values;
    }
    const cos = Math.cos(full[vertexAngle]);
    const sin = Math.sin(full[vertexAngle]);
    for (let f = 0; f < fields; f += 1) {
      const { unit } = moments[f];
      if (freePhases) {
        const [first, second, middle] = [unit[0], unit[2], unit[4]];
        const square = cos * cos * first + sin * sin * second + cos * sin * (2 * middle - first - second);
        values[2 * f] = Math.sqrt(Math.max(0, square));
        values[2 * f + 1] = 0;
      } else {
        values[2 * f] = cos * unit[0] + sin * unit[2];
        values[2 * f + 1] = cos * unit[1] + sin * unit[3];
      }
    }
    return values;
  }

  /** Asks the template for the units of all fields of the system, at every probed angle (|C|² for free phases). */
  private learn(system: FieldSystem): void {
    const { layout, probe, values, probedAngles, vertexAngle, freePhases } = this;
    for (let f = 0; f < layout.masses.length; f += 1) probe[layout.masses[f]] = system.moments[f].mass;
    for (let a = 0; a < probedAngles.length; a += 1) {
      if (vertexAngle >= 0) probe[vertexAngle] = probedAngles[a];
      this.ask();
      for (let f = 0; f < layout.masses.length; f += 1) {
        const { unit } = system.moments[f];
        const squared = freePhases && vertexAngle >= 0;
        unit[2 * a] = squared ? values[2 * f] ** 2 : values[2 * f];
        unit[2 * a + 1] = squared ? 0 : values[2 * f + 1];
      }
    }
    for (let f = 0; f < layout.masses.length; f += 1) system.moments[f].unitKnown = true;
  }

  private ask(): void {
    this.layout.template.coefficients(this.probe, this.coefficients);
    for (let j = 0; j < this.values.length; j += 1) {
      this.values[j] = this.coefficients[j] / this.weights[j >> 1];
    }
  }
}
