import { background } from './background';
import { validateAxis } from './bin-averages';
import type { TemplateDeclaration } from './declaration';
import { TemplateError, quoteValue } from './errors';
import type { TemplateFormula } from './formula';
import { freePhase } from './free-phase';
import { light } from './light';
import { lockedExact } from './locked-exact';
import { lockedSqueezed } from './locked-squeezed';
import type { OptionDeclaration } from './options';
import type { Axis, CompiledTemplate, DerivedDeclaration, ParameterDeclaration } from './types';

/** Every template, in the order in which they are listed. A new template is one new file and one entry here. */
const TEMPLATES: readonly TemplateDeclaration[] = [background, freePhase, lockedSqueezed, lockedExact, light];

/** The template of this id; throws TemplateError `unknown_template` naming those that exist. */
export function findTemplate(id: string): TemplateDeclaration {
  const found = TEMPLATES.find((template) => template.id === id);
  if (found === undefined) {
    throw new TemplateError(
      'unknown_template',
      'template.id',
      `there is no template ${quoteValue(id)}; there are ${TEMPLATES.map((template) => template.id).join(', ')}`,
    );
  }
  return found;
}

/**
 * A template with its options settled, on an axis. `options` may be as given by a user or settled already.
 *
 * `binAverage` must agree with the axis (bins or points) where it has been decided, and a `binWeight` given in
 * `options` with the axis' weight; the compiled template states both as they are. The arrays of the axis are read once
 * and not kept. Throws TemplateError for an unknown id, bad options or a bad axis.
 */
export function compileTemplate(id: string, options: unknown, axis: Axis): CompiledTemplate {
  const template = findTemplate(id);
  const settled = template.normaliseOptions(options);
  validateAxis(axis);
  const averaged = axis.kind === 'bins';
  if (settled.binAverage !== undefined && settled.binAverage !== averaged) {
    throw new TemplateError(
      'invalid_axis',
      'options.binAverage',
      averaged
        ? 'binAverage is false but the axis has bins; give the points at which to evaluate'
        : 'binAverage is true but the axis has points only; give lower and upper edges, or binAverage false',
    );
  }
  const weightGiven =
    typeof options === 'object' &&
    options !== null &&
    'binWeight' in options &&
    options.binWeight !== undefined;
  if (axis.kind === 'bins') {
    if (weightGiven && settled.binWeight !== axis.weightPower) {
      throw new TemplateError(
        'invalid_axis',
        'options.binWeight',
        `binWeight is ${settled.binWeight} but the axis is weighted with the power ${axis.weightPower}; give one of them`,
      );
    }
    return template.compile({ ...settled, binAverage: true, binWeight: axis.weightPower }, axis);
  }
  return template.compile({ ...settled, binAverage: false }, axis);
}

/** A parameter as JSON: an open end of its range is null. */
export type CatalogueParameter = Omit<ParameterDeclaration, 'range'> & {
  range: readonly [number | null, number | null];
};

/** One entry of the list of templates; plain data that survives JSON unchanged. */
export interface CatalogueEntry {
  id: string;
  version: number;
  title: string;
  summary: string;
  assumptions: readonly string[];
  options: readonly OptionDeclaration[];
  /** Parameters, derived quantities and formula for the default options. */
  parameters: CatalogueParameter[];
  derived: Omit<DerivedDeclaration, 'evaluate'>[];
  formula: TemplateFormula;
}

/** Parameter declarations as JSON data: ±Infinity becomes null. */
export function parameterData(parameters: readonly ParameterDeclaration[]): CatalogueParameter[] {
  const end = (value: number): number | null => (Number.isFinite(value) ? value : null);
  return parameters.map((parameter) => ({
    ...parameter,
    range: [end(parameter.range[0]), end(parameter.range[1])],
  }));
}

/** Every template with options, parameters, default priors and formula, each for its default options. */
export function templateCatalogue(): CatalogueEntry[] {
  return TEMPLATES.map((template) => ({
    id: template.id,
    version: template.version,
    title: template.title,
    summary: template.summary,
    assumptions: template.assumptions,
    options: template.options,
    parameters: parameterData(template.parameters({})),
    derived: template.derived({}).map(({ name, tex, symbol, label, unit, field }) => ({
      name,
      tex,
      symbol,
      label,
      unit,
      field,
    })),
    formula: template.formula({}),
  }));
}
