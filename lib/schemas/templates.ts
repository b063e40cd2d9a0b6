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
  circular: z.boolean(),
  defaultPrior: priorSchema,
});

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
