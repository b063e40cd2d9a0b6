import type { Rng } from '@/lib/sampler';
import type { LinearModel } from './collapsed';
import type { FieldMoments } from './field-moments';

/**
 * The normal equations of all fields at given masses, background integrated out: Gram matrix (2N × 2N, row-major, both
 * triangles) and right-hand side (2N), columns in the order cos 1, sin 1, cos 2, …
 */
export class FieldSystem {
  readonly size: number;
  readonly gram: Float64Array;
  readonly linear: Float64Array;
  readonly moments: FieldMoments[] = [];
  /** Counts the changes of what stands here, so that what was made of it can be kept. */
  version = 0;
  private readonly placed: Float64Array;
  private readonly block = new Float64Array(4);

  constructor(
    readonly model: LinearModel,
    readonly fields: number,
  ) {
    this.size = 2 * fields;
    this.gram = new Float64Array(this.size * this.size);
    this.linear = new Float64Array(this.size);
    this.placed = new Float64Array(fields).fill(NaN);
  }

  /** Puts field `f` in place; its cross products are stale until `link`. */
  private place(f: number, moments: FieldMoments): void {
    const n = this.size;
    const at = 2 * f * n + 2 * f;
    this.moments[f] = moments;
    this.placed[f] = moments.mass;
    this.version += 1;
    this.gram[at] = moments.gram[0];
    this.gram[at + 1] = moments.gram[1];
    this.gram[at + n] = moments.gram[1];
    this.gram[at + n + 1] = moments.gram[2];
    this.linear[2 * f] = moments.linear[0];
    this.linear[2 * f + 1] = moments.linear[1];
  }

  /** Puts one field in place and computes its products with all the others; no allocation. */
  replace(f: number, moments: FieldMoments): void {
    this.place(f, moments);
    for (let other = 0; other < this.fields; other += 1) if (other !== f) this.link(f, other);
  }

  /** Settles the system for the masses of all fields (read through `mass`); no allocation. The same again costs nothing. */
  load(mass: (field: number) => number): void {
    if (this.holds(mass)) return;
    for (let f = 0; f < this.fields; f += 1) {
      this.place(f, this.model.moments(f, mass(f)));
      for (let other = 0; other < f; other += 1) this.link(f, other);
    }
  }

  /** Whether it stands for these masses, with moments that weren't overwritten since. */
  private holds(mass: (field: number) => number): boolean {
    for (let f = 0; f < this.fields; f += 1) {
      const wanted = mass(f);
      if (this.placed[f] !== wanted || this.moments[f].mass !== wanted) return false;
    }
    return true;
  }

  private link(a: number, b: number): void {
    const n = this.size;
    const { block } = this;
    this.model.cross(this.moments[a], this.moments[b], block);
    const ab = 2 * a * n + 2 * b;
    const ba = 2 * b * n + 2 * a;
    this.gram[ab] = block[0];
    this.gram[ab + 1] = block[1];
    this.gram[ab + n] = block[2];
    this.gram[ab + n + 1] = block[3];
    this.gram[ba] = block[0];
    this.gram[ba + n] = block[1];
    this.gram[ba + 1] = block[2];
    this.gram[ba + n + 1] = block[3];
  }
}

/**
 * What the data say of the masses alone: ln evidence with everything else integrated out, approximate where priors aren't
 * normal. `full` is the full parameter vector, of which only masses and fixed values may matter.
 */
export interface MassEvidence {
  logEvidence(system: FieldSystem, full: Float64Array): number;
}

/**
 * How everything of the fields but their masses is drawn at given masses, background integrated out. `full` is the full
 * parameter vector, in which the masses (and what is held) stand already.
 */
export interface FieldStage extends MassEvidence {
  /** Draws the fields' sampled parameters into `full`. */
  draw(rng: Rng, system: FieldSystem, full: Float64Array): void;
  /** ln density of the fields' sampled parameters in `full` under `draw`. */
  logDensity(system: FieldSystem, full: Float64Array): number;
  /** True if `logEvidence` is exact for a normal likelihood, so that its density needs hardly any tempering. */
  readonly exact: boolean;
}
