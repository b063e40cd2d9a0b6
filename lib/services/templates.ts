import type { z } from 'zod';
import { AppError } from '@/lib/errors';
import type { evaluatedSchema, evaluateSchema, templateSchema } from '@/lib/schemas';
import {
  compileTemplate,
  findTemplate,
  parameterData,
  templateCatalogue,
  TemplateError,
  type Axis,
  type CompiledTemplate,
} from '@/lib/templates';

/** Every template with its options, parameters, default priors and formula. */
export function listTemplates(): z.input<typeof templateSchema>[] {
  return templateCatalogue().map((template) => ({
    ...template,
    assumptions: [...template.assumptions],
    options: template.options.map((option) => ({ ...option })),
    parameters: template.parameters.map((parameter) => ({
      ...parameter,
      range: [parameter.range[0], parameter.range[1]],
    })),
  }));
}

type Evaluate = z.output<typeof evaluateSchema>;

const refuse = (path: string, message: string, cause?: unknown): AppError =>
  new AppError('invalid', message, [{ path, message }], { cause });

/** Bins without averaging are evaluated at √(lo·hi), as a measurement without a κ column is. */
function axisOf({ kappa, bins }: Evaluate, options: Record<string, unknown>): Axis {
  if (!bins) return { kind: 'points', kappa: Float64Array.from(kappa ?? []) };
  if (options.binAverage === false) {
    return { kind: 'points', kappa: Float64Array.from(bins, ([lo, hi]) => Math.sqrt(lo * hi)) };
  }
  return {
    kind: 'bins',
    lo: Float64Array.from(bins, ([lo]) => lo),
    hi: Float64Array.from(bins, ([, hi]) => hi),
    weightPower: Number(options.binWeight ?? 0),
  };
}

/** The full parameter vector, each value where the template is defined. */
function vectorOf(template: CompiledTemplate, given: Evaluate['parameters']): Float64Array {
  const names = template.parameters.map(({ name }) => name);
  const unknown = Object.keys(given).find((name) => !names.includes(name));
  if (unknown !== undefined) {
    throw refuse(
      `parameters.${unknown}`,
      `There is no parameter ${unknown}; the template has ${names.join(', ')}.`,
    );
  }
  return Float64Array.from(template.parameters, (declaration, index) => {
    const { name, exclusiveMinimum } = declaration;
    const path = `parameters.${name}`;
    if (!Object.hasOwn(given, name)) throw refuse(path, `The value of ${name} is missing.`);
    const [lo, hi] = declaration.range;
    const value = given[name];
    if (value >= lo && value <= hi && !(exclusiveMinimum === true && value === lo)) return value;
    const [from, to] = parameterData(template.parameters)[index].range;
    const range = [
      ...(from === null ? [] : [`${exclusiveMinimum === true ? 'above' : 'at least'} ${from}`]),
      ...(to === null ? [] : [`at most ${to}`]),
    ].join(' and ');
    throw refuse(path, `${name} is ${value}; the template is defined where it is ${range}.`);
  });
}

/** A fault of the template in the terms of the request. */
function translated(error: unknown): unknown {
  if (!(error instanceof TemplateError)) return error;
  const path = error.path.replace(/^axis\.(lo|hi)/, 'bins').replace(/^axis\./, '');
  return refuse(path, error.message, error);
}

/** The prediction of a template at points or averaged over bins. `not_found` for an id that there isn't. */
export function evaluateTemplate(id: string, body: Evaluate): z.output<typeof evaluatedSchema> {
  try {
    const options = findTemplate(id).normaliseOptions(body.options);
    const template = compileTemplate(id, body.options, axisOf(body, options));
    const S = template.predict(vectorOf(template, body.parameters));
    if (!S.every(Number.isFinite)) {
      throw refuse('parameters', 'The prediction is too large for a number; give smaller parameters.');
    }
    return { S: [...S] };
  } catch (error) {
    if (error instanceof TemplateError && error.code === 'unknown_template') {
      throw new AppError('not_found', error.message, [{ path: 'id', message: error.message }], {
        cause: error,
      });
    }
    throw translated(error);
  }
}
