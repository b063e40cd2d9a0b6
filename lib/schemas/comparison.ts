import { z } from 'zod';
import { mostFields } from './field-counts';
import { evidenceSchema, snapshotSchema, startFitSchema } from './fits';
import { fitStatusSchema } from './notebooks';
import { marginalSchema } from './take-up';
import { idSchema, numberOrNull } from './shared';

const fieldCountSchema = z.number().int().min(0).max(mostFields);

/** Fits with these numbers of fields, everything else as the notebook stands; 0, 1 and 2 where left out. */
export const startComparisonSchema = startFitSchema.extend({
  fields: z.array(fieldCountSchema).min(1).max(20).optional(),
});
export type StartComparison = z.infer<typeof startComparisonSchema>;

export const comparisonStartedSchema = z.object({
  /** The revision that stands now. */
  revision: z.number().int(),
  /** In rising number of fields; `reused` where such a fit was there already. */
  fits: z.array(
    z.object({ id: idSchema, number: z.number().int(), fields: z.number().int(), reused: z.boolean() }),
  ),
  /** Numbers of fields that can't be fitted, and why. */
  skipped: z.array(z.object({ fields: z.number().int(), reason: z.string() })),
});
export type ComparisonStarted = z.infer<typeof comparisonStartedSchema>;

/** ln of a ratio of evidences, with its standard error and the error's degrees of freedom. */
const bayesFactorSchema = evidenceSchema;

/** ln evidence at another width of the amplitudes' prior: `factor` times the fit's own. */
export const widthPointSchema = z.object({
  factor: z.number(),
  /** ln Z there less ln Z at the fit's own width; null with the reason. */
  difference: numberOrNull,
  error: numberOrNull,
  because: z.string().nullable(),
});

/** How the evidence hangs on the width of the prior of the amplitudes, or of g. */
export const widthCurveSchema = z.object({
  /** Parameters whose priors are widened together, and the sd of the first of them. */
  parameters: z.array(z.string()),
  sd: z.number(),
  /** Integrated over the one mass, or from the fit's own draws, weighted. */
  method: z.enum(['exact', 'reweighted']),
  points: z.array(widthPointSchema),
});
export type WidthCurve = z.infer<typeof widthCurveSchema>;

export const comparedFitSchema = z.object({
  id: idSchema,
  number: z.number().int(),
  revision: z.number().int(),
  status: fitStatusSchema,
  template: snapshotSchema.shape.template,
  fields: z.number().int(),
  measurementVersion: z.number().int(),
  cuts: snapshotSchema.shape.cuts,
  likelihood: snapshotSchema.shape.likelihood,
  /** 0 to 1. */
  progress: z.number(),
  gate: z.object({ met: z.boolean(), reasons: z.array(z.string()) }),
  logEvidence: evidenceSchema.nullable(),
  noEvidence: z.string().nullable(),
  /** True where the evidence needs no sampling. */
  exact: z.boolean(),
  /** Against the best of its set, and against the fit without fields; null where either has no evidence. */
  lnBayesBest: bayesFactorSchema.nullable(),
  lnBayesNone: bayesFactorSchema.nullable(),
  marginals: z.array(marginalSchema.extend({ parameter: z.string(), derived: z.boolean() })),
});
export type ComparedFit = z.infer<typeof comparedFitSchema>;

export const comparisonSchema = z.object({
  /** Fits of the same numbers, cuts and likelihood; those of the notebook as it stands first. */
  sets: z.array(
    z.object({
      standing: z.boolean(),
      /** Why it can't be compared with the first set, to follow "because"; null for that one. */
      apart: z.string().nullable(),
      /** The likelihood that the evidences are of. */
      evidenceKind: z.string(),
      fits: z.array(comparedFitSchema),
    }),
  ),
  /** The notebook's settings with each number of fields, by the last fit of those; `fit` is null where there is none. */
  counts: z.array(
    z.object({
      fields: z.number().int(),
      fit: idSchema.nullable(),
      /** Why it can't be fitted; null where it can. */
      because: z.string().nullable(),
      lnBayesBest: bayesFactorSchema.nullable(),
      lnBayesNone: bayesFactorSchema.nullable(),
    }),
  ),
  /** Why the template has no family of numbers of fields; null where it has. */
  noFamily: z.string().nullable(),
  /** Of those fits that have one. */
  widths: z.array(
    z.object({
      fit: idSchema,
      number: z.number().int(),
      fields: z.number().int(),
      logEvidence: evidenceSchema,
      curve: widthCurveSchema,
    }),
  ),
});
export type Comparison = z.infer<typeof comparisonSchema>;
