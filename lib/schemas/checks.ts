import { z } from 'zod';
import { alsoShape, cutsSchema, likelihoodSchema } from './notebooks';
import { priorSchema } from './priors';
import { idSchema, instantSchema, numberOrNull, sha256Schema } from './shared';

/** A calibration where nothing else is asked for. */
export const defaultCheck = { datasets: 200, draws: 99, seed: 1 } as const;

/** Ranks run from 0 to the number of draws, and are counted in 20 intervals of equal length. */
const rankIntervals = 20;

export const startCheckSchema = z.strictObject({
  /** What is checked; so far calibration by simulation alone. */
  kind: z.literal('calibration').default('calibration'),
  /** Simulated data sets. */
  datasets: z.number().int().min(50).max(1000).default(defaultCheck.datasets),
  /** Posterior draws of each, among which the truth is ranked. */
  draws: z
    .number()
    .int()
    .min(rankIntervals - 1)
    .max(399)
    .refine((draws) => (draws + 1) % rankIntervals === 0, {
      message: `One less than a multiple of ${rankIntervals}: 19, 39, 59, 79, 99, …`,
    })
    .default(defaultCheck.draws),
  /** All randomness follows from it. */
  seed: z.number().int().min(0).default(defaultCheck.seed),
});
export type StartCheck = z.input<typeof startCheckSchema>;

export const startCheckQuerySchema = z.object({
  /** Seconds that the answer waits for the result at most. */
  wait: z.coerce.number<string>().int().min(0).max(60).default(60),
});

export const checkStatusSchema = z.enum(['queued', 'running', 'done', 'stopped', 'failed']);
export type CheckStatus = z.infer<typeof checkStatusSchema>;

/** What determines the result of a check; its SHA-256 is of its canonical JSON. */
export const checkRequestSchema = z.object({
  kind: z.literal('calibration'),
  /** Checksums of the inputs of the measurement's version: its bins and covariance are used, its values aren't. */
  inputs: z.array(sha256Schema),
  measurementVersion: z.number().int(),
  cuts: cutsSchema,
  ...alsoShape,
  likelihood: likelihoodSchema,
  mockCount: z.number().int().nullable(),
  template: z.object({
    id: z.string(),
    version: z.number().int(),
    options: z.record(z.string(), z.unknown()),
  }),
  priors: z.record(z.string(), priorSchema),
  datasets: z.number().int(),
  draws: z.number().int(),
  seed: z.number().int(),
  /** Recorded draws of warm-up of each chain. */
  warmup: z.number().int(),
  /** Version of the sampler's moves, those of new fits. */
  sampler: z.number().int(),
  program: z.string(),
});
export type CheckRequest = z.infer<typeof checkRequestSchema>;

const countPair = z.object({ lower: z.number().int(), upper: z.number().int() });

export const calibrationResultSchema = z.object({
  /** All ranks keep within their bands. */
  calibrated: z.boolean(),
  datasets: z.number().int(),
  /** Posterior draws behind each rank. */
  draws: z.number().int(),
  /** How often calibrated ranks leave the bands of all quantities together, at most. */
  alpha: z.number(),
  /** Counts of ranks below i/20 of their range, i = 1 … 19, that a quantity's keep within. */
  band: z.object({ lower: z.array(z.number().int()), upper: z.array(z.number().int()) }),
  /** Count of one bar of a histogram, for all bars of all quantities together. */
  bar: countPair,
  quantities: z.array(
    z.object({
      name: z.string(),
      counts: z.array(z.number().int()),
      bars: z.array(z.number().int()),
      /** Places at which the count is out of the band. */
      outside: z.number().int(),
      locationZ: z.number(),
      chiSquare: z.number(),
      shape: z.enum(['too low', 'too high', 'too narrow', 'too wide']).nullable(),
    }),
  ),
  coverage: z.array(
    z.object({
      name: z.string(),
      level: z.number(),
      held: z.number().int(),
      /** Share that intervals from so many draws hold when all is well. */
      expected: z.number(),
      ...countPair.shape,
    }),
  ),
  /** Draws made after warm-up, thinned to those that are ranked. */
  made: z.object({ mean: z.number(), most: z.number().int() }),
  leastEss: z.number(),
  /** Data sets, from 0, whose chain didn't mix; their ranks are counted. */
  unmixed: z.array(z.number().int()),
  /** Every rank, by quantity, in the order of the data sets. */
  ranks: z.record(z.string(), z.array(z.number().int())),
});
export type CalibrationResult = z.infer<typeof calibrationResultSchema>;

/** A check without what it found. */
export const checkListedSchema = z.object({
  id: idSchema,
  notebookId: idSchema,
  number: z.number().int(),
  kind: z.literal('calibration'),
  status: checkStatusSchema,
  /** Why it failed or waits. */
  message: z.string().nullable(),
  /** Simulated data sets that are done. */
  done: z.number().int(),
  /** 0 to 1. */
  progress: z.number(),
  /** Null where it can't be told yet, or nothing runs. */
  secondsLeft: numberOrNull,
  stopRequested: z.boolean(),
  /** The notebook's revision that it is of. */
  revision: z.number().int(),
  request: checkRequestSchema.extend({ sha256: sha256Schema }),
  calibrated: z.boolean().nullable(),
  /** In words; null until it has ended. */
  verdict: z.string().nullable(),
  startedBy: z.string(),
  createdAt: instantSchema,
  endedAt: instantSchema.nullable(),
});
export type CheckListed = z.infer<typeof checkListedSchema>;

export const notebookCheckSchema = checkListedSchema.extend({ result: calibrationResultSchema.nullable() });
export type NotebookCheck = z.infer<typeof notebookCheckSchema>;
