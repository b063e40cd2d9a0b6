import { oscillationColumns, powerColumn } from './bin-averages';
import type { TemplateFormula } from './formula';
import { optionDeclarations, settleOptions } from './options';
import type { OptionDeclaration, OptionSet, OptionValues } from './options';
import { backgroundName } from './parameters';
import type {
  Axis,
  CoefficientStructure,
  CompiledTemplate,
  DerivedDeclaration,
  FieldBlock,
  FieldKind,
  ParameterDeclaration,
} from './types';

/** What the settled options of every template contain. */
export interface SharedOptionValues {
  background: number[];
  binAverage?: boolean;
  binWeight: number;
}

/** What one template file states; `declareTemplate` makes the rest of it. */
export interface TemplateSource<S extends OptionSet> {
  id: string;
  version: number;
  title: string;
  /** One or two plain sentences. */
  summary: string;
  /** What is assumed, to be printed beside results. */
  assumptions: readonly string[];
  options: S;
  structure(options: OptionValues<S>): CoefficientStructure;
  formula(options: OptionValues<S>): TemplateFormula;
  /** In the template's order, background last. */
  parameters(options: OptionValues<S>): ParameterDeclaration[];
  derived(options: OptionValues<S>): DerivedDeclaration[];
  /** Indices of the mass parameters, one for each field. */
  masses(options: OptionValues<S>): number[];
  /** Which fields are light, those first; all are heavy where it is left out. */
  kinds?(options: OptionValues<S>): readonly FieldKind[];
  /**
   * The two columns of each field on an axis, as functions of its mass; ⟨κ^½ cos(μ ln κ)⟩ and ⟨κ^½ sin(μ ln κ)⟩ where it is
   * left out. May throw TemplateError `invalid_axis`.
   */
  fieldColumns?(options: OptionValues<S>, axis: Axis): ((mass: number, out: Float64Array[]) => void)[];
  /** Writes the coefficients of the field columns (two of each field); no allocation in it. */
  fieldCoefficients(options: OptionValues<S>): (x: ArrayLike<number>, out: Float64Array) => void;
}

/** A template as the rest of the program sees it, with its options unsettled. */
export interface TemplateDeclaration {
  readonly id: string;
  readonly version: number;
  readonly title: string;
  readonly summary: string;
  readonly assumptions: readonly string[];
  readonly options: readonly OptionDeclaration[];
  /**
   * Fills in defaults and refuses what is not understood (TemplateError at `options.…`). Keys come in a fixed order;
   * `binAverage` is left out as long as nobody has decided it.
   */
  normaliseOptions(given: unknown): Record<string, unknown>;
  formula(options: unknown): TemplateFormula;
  parameters(options: unknown): ParameterDeclaration[];
  derived(options: unknown): DerivedDeclaration[];
  /** Compiles for an axis that `validateAxis` has passed; `compileTemplate` does both. */
  compile(options: unknown, axis: Axis): CompiledTemplate;
}

const COLUMNS_PER_FIELD = 2;

/** Makes a template out of its statement. */
export function declareTemplate<S extends OptionSet>(
  source: TemplateSource<S> & { options: { background: unknown; binAverage: unknown; binWeight: unknown } },
): TemplateDeclaration {
  const settle = (given: unknown): OptionValues<S> & SharedOptionValues =>
    settleOptions(source.options, given) as OptionValues<S> & SharedOptionValues;
  return {
    id: source.id,
    version: source.version,
    title: source.title,
    summary: source.summary,
    assumptions: source.assumptions,
    options: optionDeclarations(source.options),
    normaliseOptions: (given) => ({ ...settle(given) }),
    formula: (given) => source.formula(settle(given)),
    parameters: (given) => source.parameters(settle(given)),
    derived: (given) => source.derived(settle(given)),
    compile(given, axis) {
      const options = settle(given);
      const masses = source.masses(options);
      const kinds = source.kinds?.(options);
      const fills = source.fieldColumns?.(options, axis);
      const oscillation = fills ? undefined : oscillationColumns(axis).fill;
      const length = axis.kind === 'bins' ? axis.lo.length : axis.kappa.length;
      const blocks = masses.flatMap<FieldBlock>((mass, field) => {
        const fill = fills?.[field] ?? oscillation;
        return fill ? [{ mass, kind: kinds?.[field] ?? 'heavy', width: COLUMNS_PER_FIELD, fill }] : [];
      });
      const fixedColumns = options.background.map((power) => ({
        name: backgroundName(power),
        values: powerColumn(axis, power),
      }));
      const parameters = source.parameters(options);
      const fieldColumnCount = COLUMNS_PER_FIELD * masses.length;
      const columnCount = fieldColumnCount + fixedColumns.length;
      const firstBackground = parameters.length - fixedColumns.length;
      const writeFields = source.fieldCoefficients(options);
      const coefficients = (x: ArrayLike<number>, out: Float64Array): void => {
        writeFields(x, out);
        for (let j = 0; j < fixedColumns.length; j += 1) out[fieldColumnCount + j] = x[firstBackground + j];
      };
      return {
        id: source.id,
        version: source.version,
        options: { ...options },
        structure: source.structure(options),
        parameters,
        derived: source.derived(options),
        length,
        blocks,
        fixedColumns,
        columnCount,
        coefficients,
        predict: predictColumns({ blocks, fixedColumns, length, columnCount, coefficients }),
      };
    },
  };
}

/** Σ_j column_j × coefficient_j at every place, with working space of its own. No allocation where `out` is given. */
export function predictColumns({
  blocks,
  fixedColumns,
  length,
  columnCount,
  coefficients,
}: Pick<
  CompiledTemplate,
  'blocks' | 'fixedColumns' | 'length' | 'columnCount' | 'coefficients'
>): CompiledTemplate['predict'] {
  const weights = new Float64Array(columnCount);
  const columns = Array.from({ length: COLUMNS_PER_FIELD }, () => new Float64Array(length));
  return (x, out = new Float64Array(length)) => {
    coefficients(x, weights);
    out.fill(0);
    let j = 0;
    for (let b = 0; b < blocks.length; b += 1) {
      blocks[b].fill(x[blocks[b].mass], columns);
      for (let c = 0; c < blocks[b].width; c += 1) {
        const column = columns[c];
        const weight = weights[j];
        for (let i = 0; i < length; i += 1) out[i] += weight * column[i];
        j += 1;
      }
    }
    for (let k = 0; k < fixedColumns.length; k += 1) {
      const column = fixedColumns[k].values;
      const weight = weights[j];
      for (let i = 0; i < length; i += 1) out[i] += weight * column[i];
      j += 1;
    }
    return out;
  };
}
