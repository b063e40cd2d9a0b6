import { z } from 'zod';
import { excludedBinSchema, fitStatusSchema } from './notebooks';
import { idSchema, numberOrNull } from './shared';

/** Moves a notebook to another version of its measurement and repeats its finished fits there. */
export const takeUpSchema = z.strictObject({
  version: z.number().int().min(1),
  /** Which measurement of the notebook it is a version of; its first one where left out. */
  measurement: idSchema.optional(),
});
export type TakeUp = z.infer<typeof takeUpSchema>;

/** A fit whose settings can't be fitted on the version taken up, and why. */
const skippedSchema = z.object({ number: z.number().int(), reason: z.string() });

export const takenUpSchema = z.object({
  id: idSchema,
  number: z.number().int(),
  title: z.string(),
  version: z.number().int(),
  /** The revision that stands now. */
  revision: z.number().int(),
  /** Fits that were queued, with the numbers of those that they repeat. */
  fits: z.array(z.object({ id: idSchema, number: z.number().int(), repeats: z.number().int() })),
  skipped: z.array(skippedSchema),
  /** Bins that were left out and that the version taken up hasn't got, by their numbers before. */
  dropped: z.array(excludedBinSchema),
});
export type TakenUp = z.infer<typeof takenUpSchema>;

/** The same for every notebook that rests on another version; one that can't be moved stays as it is. */
export const allTakenUpSchema = z.object({
  notebooks: z.array(takenUpSchema),
  refused: z.array(
    z.object({ id: idSchema, number: z.number().int(), title: z.string(), reason: z.string() }),
  ),
});
export type AllTakenUp = z.infer<typeof allTakenUpSchema>;

const shiftedFitSchema = z.object({
  id: idSchema,
  number: z.number().int(),
  version: z.number().int(),
  status: fitStatusSchema,
});

/** Median and 68 % interval of a marginal; `mcse` is the Monte Carlo standard error of the median. */
export const marginalSchema = z.object({
  median: z.number(),
  lo68: z.number(),
  hi68: z.number(),
  sd: z.number(),
  mcse: numberOrNull,
});
export type Marginal = z.infer<typeof marginalSchema>;

/** How a quantity moved from one fit to the one that repeats it; what has no value yet is null. */
export const shiftSchema = z.object({
  parameter: z.string(),
  derived: z.boolean(),
  old: marginalSchema.nullable(),
  new: marginalSchema.nullable(),
  /** (new − old median) / √(sd² + sd²), and its Monte Carlo standard error. */
  shift: numberOrNull,
  shiftMcse: numberOrNull,
});
export type Shift = z.infer<typeof shiftSchema>;

export const shiftsSchema = z.object({
  /** Newest first. */
  pairs: z.array(
    z.object({
      template: z.object({ id: z.string(), options: z.record(z.string(), z.unknown()) }),
      old: shiftedFitSchema,
      new: shiftedFitSchema,
      shifts: z.array(shiftSchema),
    }),
  ),
});
export type Shifts = z.infer<typeof shiftsSchema>;
