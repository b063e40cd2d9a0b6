/**
 * The vocabulary of template declarations. Pure: no framework, no I/O.
 * kappa = k_long / k_short is dimensionless; masses are given as mu = sqrt(m²/H² − 9/4), dimensionless.
 */

/** Which cubic vertex: 1 = π̇²σ/Λ₁, 2 = (∂π)²σ/(a²Λ₂). */
export type Vertex = 1 | 2;

/** A field heavier than 3H/2, which oscillates (mass parameter μ), or lighter, which scales as a power (ν). */
export type FieldKind = 'heavy' | 'light';

/** A prior density of one parameter; `fixed` takes the parameter out of the sampled set. */
export type Prior =
  | { kind: 'uniform'; lo: number; hi: number }
  | { kind: 'log-uniform'; lo: number; hi: number }
  | { kind: 'normal'; mean: number; sd: number }
  | { kind: 'half-normal'; sd: number }
  | { kind: 'truncated-normal'; mean: number; sd: number; lo: number; hi: number }
  | { kind: 'fixed'; value: number }
  | { kind: 'isotropic' };

export type ParameterRole =
  | 'mass'
  | 'angle'
  | 'phase'
  | 'amplitude'
  | 'quadrature'
  | 'coupling'
  | 'vertex-angle'
  | 'background'
  /** Coefficient of a column that came with the measurement. */
  | 'column';

export interface ParameterDeclaration {
  /** Name in the API, in sample files and in priors: `mu1`, `a1`, `theta`, `g`, `c1`. */
  name: string;
  /** TeX symbol: `\\mu_1`. */
  tex: string;
  /** Symbol as base letter and subscript, for HTML: `{base: 'μ', sub: '1'}`. */
  symbol: { base: string; sub: string };
  /** In words: `mass 1`, `mixing angle`, `background κ²`. */
  label: string;
  /** Unit; the empty string for a dimensionless quantity. */
  unit: string;
  role: ParameterRole;
  /** 0-based field number for what belongs to one field, else null. */
  field: number | null;
  /** Where the template is defined, inclusive; ±Infinity allowed. A prior outside is refused. */
  range: readonly [number, number];
  /** True where the lower end itself is a limit that a prior may reach but a fixed value may not take. */
  exclusiveMinimum?: boolean;
  /** True for a phase, which lives on a circle of 2π. */
  circular: boolean;
  defaultPrior: Prior;
}

/** Where a prediction is wanted: averaged over bins, or at points. Everything dimensionless. */
export type Axis =
  | {
      kind: 'bins';
      /** Lower and upper edges in kappa, 0 < lo < hi. */
      lo: Float64Array;
      hi: Float64Array;
      /** Mean over ln kappa with weight kappa^q; 0 = uniform in ln kappa. */
      weightPower: number;
    }
  | { kind: 'points'; kappa: Float64Array };

/** The columns that belong to one field and depend on its mass parameter alone. */
export interface FieldBlock {
  /** Index of the mass parameter in `parameters`. */
  mass: number;
  /** Whether the mass parameter is μ or ν. */
  kind: FieldKind;
  /** Number of columns. */
  width: number;
  /** Writes the columns at this mass into `out[0 … width−1]`, each of the axis' length. */
  fill(mass: number, out: Float64Array[]): void;
}

/** A derived quantity that is reported and written into sample files. */
export interface DerivedDeclaration {
  name: string;
  tex: string;
  symbol: { base: string; sub: string };
  label: string;
  unit: string;
  field: number | null;
  /** Value from the full parameter vector (template order, fixed ones included). */
  evaluate(x: ArrayLike<number>): number;
}

/**
 * How the linear coefficients hang on the parameters; the spectral jump reads it.
 * - `linear`: every non-mass parameter is itself a coefficient (quadrature amplitudes, background).
 * - `polar`: each field has amplitude A ≥ 0 and phase φ, coefficients (A cos φ, −A sin φ).
 * - `mixed`: locked phases; coefficients g w_i(angles) u_i(mu_i) with one common coupling g.
 * - `mixed-polar`: phases free; coefficients g w_i |C(mu_i)| (cos φ_i, −sin φ_i).
 * - `background`: no field at all.
 */
export type CoefficientStructure = 'linear' | 'polar' | 'mixed' | 'mixed-polar' | 'background';

/** A template with its options settled and its axis known: prediction = Σ_j column_j × coefficient_j. */
export interface CompiledTemplate {
  id: string;
  version: number;
  /** Options with every default filled in, in a fixed key order; JSON-serialisable. */
  options: Record<string, unknown>;
  structure: CoefficientStructure;
  parameters: readonly ParameterDeclaration[];
  derived: readonly DerivedDeclaration[];
  /** Number of predicted values. */
  length: number;
  blocks: readonly FieldBlock[];
  /**
   * Columns that depend on no parameter: the smooth background ⟨kappa^p⟩, one a power, then those that came with the measurement. Their
   * coefficients are the last parameters, in this order.
   */
  fixedColumns: readonly { name: string; values: Float64Array }[];
  /** Total number of columns: Σ widths + fixedColumns.length. */
  columnCount: number;
  /**
   * Coefficients of all columns, in the order block 0's, block 1's, …, fixed columns, from the full parameter
   * vector `x` (template order). Writes `columnCount` numbers into `out`.
   */
  coefficients(x: ArrayLike<number>, out: Float64Array): void;
  /** The prediction S at every value of the axis (dimensionless shape function), for the full parameter vector. */
  predict(x: ArrayLike<number>, out?: Float64Array): Float64Array;
}
