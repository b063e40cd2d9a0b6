import { requireLength } from '../inference-error';
import { buildMetric } from '../metric';
import { layOutParameters, scalarPriorOf, type ParameterLayout } from '../parameter-layout';
import type { InferenceSpec, LikelihoodKind } from '../types';
import { whitenBackground } from '../target';
import type { Whitening } from '../whitening';
import { CollapsedEvidence } from './collapsed-evidence';
import type { Coordinates } from './coordinates';
import { linearPrior, type LinearPrior } from './linear-prior';
import {
  applyDesign,
  fieldColumns,
  fillMoments,
  newMoments,
  type CollapsedBlock,
  type FieldColumns,
  type Moments,
} from './moments';
import { bestFit, type BestFit } from './profile';
import { logSumExp } from './quadrature-nodes';
import { templateCoordinates } from './template-coordinates';

/** A best fit at given masses, with its coefficients: the design's, then the fixed columns'. */
export interface MassFit extends BestFit {
  /** Coefficients of the fields' raw columns. */
  raw: Float64Array;
}

/**
 * Blocks with shared columns, collapsed: for given masses the highest likelihood with flat linear terms, and the likelihood
 * integrated over everything else under the priors. Exact for every likelihood; see `CollapsedEvidence`.
 */
export class CollapsedModel {
  /** Number of raw columns of all fields. */
  readonly raw: number;
  private readonly rawMoments: Moments[];
  private readonly reduced = new Map<number, Moments[]>();
  private readonly evidences = new Map<readonly LinearPrior[], CollapsedEvidence>();
  private readonly bounds: LinearPrior[];

  constructor(
    readonly blocks: readonly CollapsedBlock[],
    readonly coordinates: Coordinates,
    /** Priors of the coefficients of the fixed columns. */
    fixedPriors: readonly LinearPrior[],
  ) {
    this.raw = blocks[0].widths.reduce((sum, width) => sum + width, 0);
    this.bounds = [...fixedPriors];
    this.rawMoments = blocks.map(({ fixed }) => newMoments(this.raw + fixed.length));
  }

  get fields(): number {
    return this.blocks[0].widths.length;
  }

  columns(field: number, mass: number): FieldColumns {
    return fieldColumns(this.blocks, field, mass);
  }

  /** The best fit without any field. */
  background(): BestFit {
    const moments = this.blocks.map((block, b) => {
      const out = newMoments(block.fixed.length);
      const bare: CollapsedBlock = { ...block, widths: [] };
      fillMoments(bare, b, [], out);
      return out;
    });
    return bestFit(
      moments,
      this.blocks.map(({ likelihood }) => likelihood),
    );
  }

  /** ln evidence without any field. */
  backgroundEvidence(): number {
    const moments = this.blocks.map((block, b) => {
      const out = newMoments(block.fixed.length);
      fillMoments({ ...block, widths: [] }, b, [], out);
      return out;
    });
    return this.evidenceOf(this.bounds).logEvidence(moments);
  }

  /** The best fit at these masses; `columns` may hold what `columns()` gave for them. */
  fit(masses: ArrayLike<number>, columns?: readonly FieldColumns[]): MassFit {
    this.load(masses, columns);
    const likelihoods = this.blocks.map(({ likelihood }) => likelihood);
    let best: MassFit | null = null;
    const consider = (
      moments: readonly Moments[],
      matrix: Float64Array,
      offset: Float64Array | null,
      count: number,
    ): BestFit => {
      const found = bestFit(moments, likelihoods);
      if (best && !(found.logLikelihood > best.logLikelihood)) return found;
      const raw = offset ? Float64Array.from(offset) : new Float64Array(this.raw);
      for (let a = 0; a < this.raw; a += 1) {
        for (let j = 0; j < count; j += 1) raw[a] += matrix[a * count + j] * found.coefficients[j];
      }
      best = { ...found, raw };
      return found;
    };
    for (const { design, sameSign } of this.coordinates.profile(masses)) {
      const moments = this.reduce(design.count);
      this.blocks.forEach((_, b) => applyDesign(this.rawMoments[b], design, moments[b]));
      if (!sameSign) {
        consider(moments, design.matrix, design.offset, design.count);
        continue;
      }
      const free = bestFit(moments, likelihoods);
      if (free.coefficients[0] * free.coefficients[1] >= 0) {
        consider(moments, design.matrix, design.offset, 2);
        continue;
      }
      for (const kept of [0, 1]) {
        const one = Float64Array.from({ length: this.raw }, (_, a) => design.matrix[a * 2 + kept]);
        const single = this.reduce(1);
        this.blocks.forEach((_, b) =>
          applyDesign(this.rawMoments[b], { raw: this.raw, count: 1, matrix: one, offset: null }, single[b]),
        );
        consider(single, one, null, 1);
      }
    }
    if (!best) throw new TypeError('no design to fit');
    return best;
  }

  /**
   * ln p(d | masses) with the priors of the linear terms, phases and angles, those of the masses left out; null where that
   * isn't done by quadrature (two fields with free phases). `sharpness`: √Δχ² of what is there.
   */
  logEvidence(
    masses: ArrayLike<number>,
    sharpness: number,
    columns?: readonly FieldColumns[],
  ): number | null {
    const designs = this.coordinates.evidence(masses, sharpness);
    if (!designs) return null;
    this.load(masses, columns);
    const terms = designs.map(({ design, priors, logWeight }) => {
      const moments = this.reduce(design.count);
      this.blocks.forEach((_, b) => applyDesign(this.rawMoments[b], design, moments[b]));
      return logWeight + this.evidenceOf(priors).logEvidence(moments);
    });
    return logSumExp(terms);
  }

  private evidenceOf(priors: readonly LinearPrior[]): CollapsedEvidence {
    let made = this.evidences.get(priors);
    if (!made) {
      const all = priors === this.bounds ? priors : [...priors, ...this.bounds];
      made = new CollapsedEvidence(
        this.blocks.map(({ likelihood }) => likelihood),
        all,
      );
      this.evidences.set(priors, made);
    }
    return made;
  }

  private load(masses: ArrayLike<number>, columns?: readonly FieldColumns[]): void {
    const fields = columns ?? Array.from(masses, (mass, f) => this.columns(f, mass));
    this.blocks.forEach((block, b) => fillMoments(block, b, fields, this.rawMoments[b]));
  }

  private reduce(count: number): Moments[] {
    let made = this.reduced.get(count);
    if (!made) {
      made = this.blocks.map(({ fixed }) => newMoments(count + fixed.length));
      this.reduced.set(count, made);
    }
    return made;
  }
}

/** The likelihood that models are compared by: the Sellentin–Heavens exponent in the matched one's place, which hangs on the model. */
export const comparingKind = (kind: LikelihoodKind): LikelihoodKind =>
  kind === 'matched-t' ? 'sellentin-heavens' : kind;

/**
 * A notebook's measurement as a collapsed model: one block, or one for each of several independent parts that don't share a likelihood.
 * Throws InferenceError as `buildInference` does, and `no_frequency` for a template without or with more than two fields.
 */
export function buildCollapsedModel(
  spec: InferenceSpec,
  kindOf: (kind: LikelihoodKind) => LikelihoodKind = comparingKind,
): CollapsedModel {
  const layout = layOutParameters(spec);
  const coordinates = templateCoordinates(layout);
  return new CollapsedModel(
    collapsedBlocks(spec, layout, kindOf(spec.likelihood)),
    coordinates,
    backgroundPriors(layout),
  );
}

/** Priors of a layout's sampled background coefficients. */
export function backgroundPriors(layout: ParameterLayout): LinearPrior[] {
  return layout.background.flatMap((index) => {
    const prior = scalarPriorOf(layout, index);
    return prior ? [linearPrior(prior)] : [];
  });
}

/** The parts of a spec's data in their own metric, fixed coefficients taken off the data. */
export function collapsedBlocks(
  spec: InferenceSpec,
  layout: ParameterLayout,
  kind: LikelihoodKind,
): CollapsedBlock[] {
  const { data, template } = spec;
  requireLength(spec);
  const { whitening, parts } = buildMetric(data, kind, layout.free.length);
  const p = whitening.length;
  const values = Float64Array.from(whitening.data);
  const background = whitenBackground(layout, whitening);
  const own: Float64Array[] = [];
  layout.background.forEach((index, j) => {
    const column = background.subarray(j * p, (j + 1) * p);
    if (layout.position[index] >= 0) own.push(column);
    else for (let i = 0; i < p; i += 1) values[i] -= layout.base[index] * column[i];
  });
  const whole = wholeColumns(spec, whitening);
  return parts.map(({ from, to, likelihood }) => ({
    data: values.subarray(from, to),
    likelihood,
    fixed: own.map((column) => {
      const part = column.subarray(from, to);
      return part.every((value) => value === 0) ? null : part;
    }),
    widths: template.blocks.map(({ width }) => width),
    fill(field, mass, out) {
      const columns = whole(field, mass);
      const length = to - from;
      for (let c = 0; c < template.blocks[field].width; c += 1) {
        out.set(columns.subarray(c * p + from, c * p + to), c * length);
      }
    },
  }));
}

/** Whitened columns of a field over all the data, kept while the next call is for the same mass: every part asks in turn. */
function wholeColumns({ template }: InferenceSpec, { length: p, apply }: Whitening) {
  const kept = template.blocks.map(({ width }) => ({
    mass: NaN,
    scratch: Array.from({ length: width }, () => new Float64Array(p)),
    columns: new Float64Array(width * p),
  }));
  return (field: number, mass: number): Float64Array => {
    const own = kept[field];
    if (own.mass === mass) return own.columns;
    template.blocks[field].fill(mass, own.scratch);
    own.scratch.forEach((column, c) => {
      own.columns.set(column, c * p);
      apply(own.columns, c * p);
    });
    own.mass = mass;
    return own.columns;
  };
}
