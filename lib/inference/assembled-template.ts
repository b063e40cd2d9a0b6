import {
  columnNameFault,
  columnParameter,
  compileTemplate,
  ofPart,
  predictColumns,
  type Axis,
  type CompiledTemplate,
  type FieldBlock,
  type ParameterDeclaration,
} from '@/lib/templates';
import { InferenceError } from './inference-error';

/** A column that came with a measurement: one number for each of its values, in the unit of S over that of its coefficient. */
export interface AssemblyColumn {
  name: string;
  values: Float64Array;
}

/** Where one measurement's values come from. */
export interface PartModel {
  /** What the group calls the measurement; it stands in labels. */
  label: string;
  /** Number of its values after the cuts, p. */
  length: number;
  /** Where the theory is evaluated: the values' own bins or points, or those of the window, n of them. */
  axis: Axis;
  /** Window matrix, p × n row-major: the prediction of a value is that row times the theory. Left out where the two axes are one. */
  window?: Float64Array;
  columns?: readonly AssemblyColumn[];
}

interface Part extends PartModel {
  /** First of its rows in the data. */
  from: number;
  compiled: CompiledTemplate;
}

const isBackground = ({ role }: ParameterDeclaration): boolean => role === 'background';

/**
 * The parameters of a template on several measurements: what the fields have, once; then the background of every measurement; then the
 * columns of every measurement. With one measurement names are as they are, with several those of backgrounds and columns end with the
 * measurement's number, `c1_2`.
 */
export function assembledParameters(
  parameters: readonly ParameterDeclaration[],
  parts: readonly { label: string; columns?: readonly { name: string }[] }[],
): ParameterDeclaration[] {
  const own = (parameter: ParameterDeclaration, k: number): ParameterDeclaration =>
    parts.length === 1 ? parameter : ofPart(parameter, k, parts[k].label);
  return [
    ...parameters.filter((parameter) => !isBackground(parameter)),
    ...parts.flatMap((_, k) => parameters.filter(isBackground).map((parameter) => own(parameter, k))),
    ...parts.flatMap(({ columns = [] }, k) => columns.map(({ name }) => own(columnParameter(name), k))),
  ];
}

/**
 * One template over the values of several measurements, one after the other: prediction = W_k · B_k(η) c + Σ_j d_j column_j in each. Masses,
 * angles, amplitudes and phases are shared; backgrounds and columns are each measurement's own. Columns don't pass through the window.
 *
 * Throws TemplateError as `compileTemplate`, and InferenceError `window_size`, `column_size` or `column_name` at `parts[k]…`.
 */
export function assembleTemplate(
  parts: readonly PartModel[],
  template: { id: string; options: unknown },
): CompiledTemplate {
  const compiled = parts.map(({ axis }) => compileTemplate(template.id, template.options, axis));
  parts.forEach((part, k) => checkPart(part, compiled[k], k));
  const [only] = compiled;
  if (parts.length === 1 && !parts[0].window && !parts[0].columns?.length) return only;
  let from = 0;
  const placed = parts.map((part, k): Part => {
    const here = { ...part, from, compiled: compiled[k] };
    from += part.length;
    return here;
  });
  return join(placed, from);
}

/**
 * The theory of one of the measurements at other places than its own, with all the parameters that `assembleTemplate` has: for a curve
 * drawn through its figure. No window and no columns: those are known at the measurement's values only.
 */
export function theoryOfPart(
  parts: readonly PartModel[],
  template: { id: string; options: unknown },
  which: number,
  axis: Axis,
): CompiledTemplate {
  const compiled = compileTemplate(template.id, template.options, axis);
  const { length } = compiled;
  const placed = parts.map((part, k): Part => {
    const mine = k === which;
    const columns = part.columns?.map(({ name }) => ({ name, values: new Float64Array(mine ? length : 0) }));
    return {
      label: part.label,
      axis,
      from: k > which ? length : 0,
      length: mine ? length : 0,
      compiled,
      columns,
    };
  });
  return join(placed, length);
}

function checkPart(
  { length, window: matrix, columns = [] }: PartModel,
  { length: n }: CompiledTemplate,
  k: number,
): void {
  if (matrix ? matrix.length !== length * n : n !== length) {
    throw new InferenceError(
      'window_size',
      `parts[${k}].window`,
      matrix
        ? `the window has ${matrix.length} numbers; ${length} data values of ${n} theory bins need ${length} × ${n} = ${length * n}`
        : `the theory is evaluated at ${n} places for ${length} data values, and there is no window`,
      'give a window matrix with a row for each data value and a column for each theory bin',
    );
  }
  const names = columns.map(({ name }) => name);
  columns.forEach(({ name, values }, j) => {
    const path = `parts[${k}].columns[${j}]`;
    const fault = columnNameFault(name) ?? (names.indexOf(name) < j ? 'is there twice' : null);
    if (fault) {
      throw new InferenceError(
        'column_name',
        `${path}.name`,
        `“${name}” ${fault}`,
        'give every column a name of its own',
      );
    }
    if (values.length !== length || !values.every(Number.isFinite)) {
      throw new InferenceError(
        'column_size',
        `${path}.values`,
        `column ${name} has ${values.length} numbers for ${length} data values, or one that isn't finite`,
        'give one finite number for each data value, and cut columns as the data',
      );
    }
  });
}

/** The theory's column as the values of a part see it, written from its first row on. */
function seeThrough({ window: matrix, length, from }: Part, theory: Float64Array, out: Float64Array): void {
  if (!matrix) {
    if (length > 0) out.set(theory, from);
    return;
  }
  const n = theory.length;
  for (let i = 0; i < length; i += 1) {
    let sum = 0;
    for (let j = 0; j < n; j += 1) sum += matrix[i * n + j] * theory[j];
    out[from + i] = sum;
  }
}

function joinBlocks(parts: readonly Part[]): FieldBlock[] {
  return parts[0].compiled.blocks.map((block, b): FieldBlock => {
    const scratch = parts.map(({ compiled }) =>
      Array.from({ length: block.width }, () => new Float64Array(compiled.length)),
    );
    return {
      ...block,
      fill(mass, out) {
        parts.forEach((part, k) => {
          if (part.length === 0) return;
          part.compiled.blocks[b].fill(mass, scratch[k]);
          scratch[k].forEach((column, c) => seeThrough(part, column, out[c]));
        });
      },
    };
  });
}

function join(parts: readonly Part[], length: number): CompiledTemplate {
  const base = parts[0].compiled;
  const parameters = assembledParameters(base.parameters, parts);
  const placed = (write: (out: Float64Array) => void): Float64Array => {
    const out = new Float64Array(length);
    write(out);
    return out;
  };
  const values = [
    ...parts.flatMap((part) =>
      part.compiled.fixedColumns.map((column) => placed((out) => seeThrough(part, column.values, out))),
    ),
    ...parts.flatMap(({ columns = [], from }) =>
      columns.map((column) => placed((out) => out.set(column.values, from))),
    ),
  ];
  const first = parameters.length - values.length;
  const fixedColumns = values.map((column, j) => ({ name: parameters[first + j].name, values: column }));
  const blocks = joinBlocks(parts);
  const fieldColumns = blocks.reduce((sum, { width }) => sum + width, 0);
  const columnCount = fieldColumns + values.length;
  const coefficients = (x: ArrayLike<number>, out: Float64Array): void => {
    // The first measurement's own template reads the fields' parameters and the first background where it knows them.
    base.coefficients(x, out);
    for (let j = 0; j < values.length; j += 1) out[fieldColumns + j] = x[first + j];
  };
  return {
    ...base,
    options: sharedOptions(parts),
    parameters,
    length,
    blocks,
    fixedColumns,
    columnCount,
    coefficients,
    predict: predictColumns({ blocks, fixedColumns, length, columnCount, coefficients }),
  };
}

/** The options that hold for all; whether bins are averaged is left out where the measurements differ in it. */
function sharedOptions(parts: readonly Part[]): Record<string, unknown> {
  const { options } = parts[0].compiled;
  return Object.fromEntries(
    Object.entries(options).filter(([name, value]) =>
      parts.every(({ compiled }) => Array.isArray(value) || compiled.options[name] === value),
    ),
  );
}
