import { z } from 'zod';
import { priorSchema } from './priors';

/** A template's id and options as a request gives them; lib/templates normalises and judges the options. */
export const templateChoiceSchema = z.strictObject({
  id: z.string().min(1),
  options: z.record(z.string(), z.unknown()).default({}),
});
export type TemplateChoice = z.infer<typeof templateChoiceSchema>;

export const parameterSchema = z.object({
  name: z.string(),
  tex: z.string(),
  symbol: z.object({ base: z.string(), sub: z.string() }),
  label: z.string(),
  unit: z.string(),
  role: z.string(),
  field: z.number().int().nullable(),
  /** Where the template is defined; null stands for an open end. */
  range: z.tuple([z.number().nullable(), z.number().nullable()]),
  /** True where the lower end is a limit that a fixed value may not take. */
  exclusiveMinimum: z.boolean().optional(),
  circular: z.boolean(),
  defaultPrior: priorSchema,
});

/** One option of a template: what it accepts, by `kind`. */
export const templateOptionSchema = z.object({
  name: z.string(),
  kind: z.enum(['integer', 'number', 'choice', 'powers', 'fields', 'boolean']),
  min: z.number().optional(),
  max: z.number().optional(),
  values: z
    .array(z.union([z.string(), z.number()]))
    .readonly()
    .optional(),
  default: z.union([z.string(), z.number(), z.boolean(), z.array(z.number()).readonly(), z.null()]),
  description: z.string(),
});

/** A template; parameters, derived quantities and formula are those of its default options. */
export const templateSchema = z.object({
  id: z.string(),
  version: z.number().int(),
  title: z.string(),
  summary: z.string(),
  assumptions: z.array(z.string()),
  options: z.array(templateOptionSchema),
  parameters: z.array(parameterSchema),
  derived: z.array(
    z.object({
      name: z.string(),
      tex: z.string(),
      symbol: z.object({ base: z.string(), sub: z.string() }),
      label: z.string(),
      unit: z.string(),
      field: z.number().int().nullable(),
    }),
  ),
  formula: z.object({ wide: z.string(), lines: z.array(z.string()), definitions: z.array(z.string()) }),
});
export type Template = z.infer<typeof templateSchema>;

export const evaluateSchema = z
  .strictObject({
    options: z.record(z.string(), z.unknown()).default({}),
    parameters: z.record(z.string(), z.number()),
    kappa: z.array(z.number().positive()).min(1).max(10_000).optional(),
    bins: z
      .array(z.tuple([z.number().positive(), z.number().positive()]))
      .min(1)
      .max(10_000)
      .optional(),
  })
  .refine((body) => (body.kappa === undefined) !== (body.bins === undefined), {
    message: 'Give either kappa or bins, not both.',
    path: ['kappa'],
  });

export const evaluatedSchema = z.object({ S: z.array(z.number()) });
