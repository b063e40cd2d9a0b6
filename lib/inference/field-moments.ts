/** What one field at one mass contributes: its columns and their products with everything but other fields. */
export interface FieldMoments {
  mass: number;
  /** Whitened cosine and sine column, 2 × p. */
  readonly columns: Float64Array;
  /** Gram matrix with the background integrated out: (cos cos, cos sin, sin sin). */
  readonly gram: Float64Array;
  /** Products with the data, background integrated out. */
  readonly linear: Float64Array;
  /** V_f: 2 × (number of background coefficients). */
  readonly v: Float64Array;
  /** What the template says of the field's unit at this mass, kept for `FieldUnits`; stale unless `unitKnown`. */
  readonly unit: Float64Array;
  unitKnown: boolean;
}

/** Moments of a model with `background` coefficients and columns of length p, not yet filled. */
export function newFieldMoments(background: number, p: number): FieldMoments {
  return {
    mass: NaN,
    columns: new Float64Array(2 * p),
    gram: new Float64Array(3),
    linear: new Float64Array(2),
    v: new Float64Array(2 * background),
    unit: new Float64Array(6),
    unitKnown: false,
  };
}
