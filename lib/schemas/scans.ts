import { z } from 'zod';
import { alsoShape, cutsSchema, likelihoodSchema } from './notebooks';
import { priorSchema } from './priors';
import { idSchema, instantSchema, numberOrNull, sha256Schema } from './shared';

export const defaultNulls = 20_000;

export const startScanSchema = z.strictObject({
  /** Range of μ; the reach of the notebook's mass priors where left out. */
  muMin: z.number().min(0).max(100).optional(),
  muMax: z.number().positive().max(100).optional(),
  /** Simulated measurements without a signal, for the global significance. */
  nulls: z.number().int().min(100).max(100_000).optional(),
});
export type StartScan = z.infer<typeof startScanSchema>;

export const scanStatusSchema = z.enum(['queued', 'running', 'done', 'failed']);
export type ScanStatus = z.infer<typeof scanStatusSchema>;

/** What determines the result of a scan; its SHA-256 is of its canonical JSON. */
export const scanRequestSchema = z.object({
  /** Checksums of the inputs of the measurement's version: its nulls are drawn from them. */
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
  muMin: z.number(),
  muMax: z.number(),
  nulls: z.number().int(),
  program: z.string(),
});
export type ScanRequest = z.infer<typeof scanRequestSchema>;

const heightSchema = {
  /** Probability of as high a maximum anywhere in the range without a signal; null where nulls can't be drawn. */
  globalP: numberOrNull,
  /** Nulls behind it. */
  nulls: z.number().int(),
};

/** Heights that a share p of the nulls reaches anywhere in the range. */
const thresholdsSchema = z.array(z.object({ p: z.number(), deltaChi2: z.number() }));

export const scanResultSchema = z.object({
  mu: z.array(z.number()),
  deltaChi2: z.array(z.number()),
  /** ln p(d | μ) with the linear priors. */
  logEvidence: z.array(numberOrNull),
  backgroundLogEvidence: numberOrNull,
  best: z.object({ mu: z.number(), deltaChi2: z.number(), parameters: z.record(z.string(), z.number()) }),
  localP: numberOrNull,
  /** Degrees of freedom of Δχ² at one frequency; null where the fit there isn't linear. */
  freedom: z.number().int().nullable(),
  ...heightSchema,
  globalPUpcrossing: numberOrNull,
  /** Δχ² whose global p is 5 % and 1 %, of the nulls; empty where there are none, or too few. */
  thresholds: thresholdsSchema.default([]),
  aliases: z.array(z.number()),
  coverage: z.object({
    length: z.number(),
    resolution: z.number(),
    spacing: z.number(),
    nyquist: z.number(),
  }),
  window: z.object({ mu: z.array(z.number()), power: z.array(z.number()) }),
  /** Two fields: pairs μ1 < μ2 of one axis, row by row, null elsewhere. */
  plane: z
    .object({
      mu: z.array(z.number()),
      deltaChi2: z.array(numberOrNull),
      logEvidence: z.array(numberOrNull).nullable(),
      best: z.object({ mu: z.array(z.number()), deltaChi2: z.number() }),
      ...heightSchema,
    })
    .nullable(),
});
export type ScanResult = z.infer<typeof scanResultSchema>;

const found = scanResultSchema.shape;

/** A scan; what it found is null until it has ended, and while its measurement is blind. */
export const scanSchema = z.object({
  id: idSchema,
  notebookId: idSchema,
  number: z.number().int(),
  status: scanStatusSchema,
  message: z.string().nullable(),
  progress: z.number(),
  blind: z.boolean(),
  request: scanRequestSchema.extend({ sha256: sha256Schema }),
  startedBy: z.string(),
  createdAt: instantSchema,
  endedAt: instantSchema.nullable(),
  mu: found.mu.nullable(),
  deltaChi2: found.deltaChi2.nullable(),
  logEvidence: found.logEvidence.nullable(),
  backgroundLogEvidence: found.backgroundLogEvidence,
  best: found.best.nullable(),
  localP: found.localP,
  freedom: found.freedom,
  globalP: found.globalP,
  nulls: found.nulls.nullable(),
  globalPUpcrossing: found.globalPUpcrossing,
  thresholds: thresholdsSchema.nullable(),
  aliases: found.aliases.nullable(),
  coverage: found.coverage.nullable(),
  window: found.window.nullable(),
  plane: found.plane,
});
export type Scan = z.infer<typeof scanSchema>;

/** One look for a signal: a scan of one frequency, or of two together. */
export const trialSchema = z.object({
  scan: idSchema,
  number: z.number().int(),
  kind: z.enum(['one', 'two']),
  status: scanStatusSchema,
  template: z.object({ id: z.string(), options: z.record(z.string(), z.unknown()) }),
  cuts: cutsSchema,
  measurementVersion: z.number().int(),
  muMin: z.number(),
  muMax: z.number(),
  /** Simulated measurements behind its global p; as many as were asked for until it has ended. */
  nulls: z.number().int(),
  best: z.array(z.number()).nullable(),
  deltaChi2: numberOrNull,
  localP: numberOrNull,
  globalP: numberOrNull,
  /** Whether it is judged on the nulls that the others share. */
  shared: z.boolean(),
  by: z.string(),
  at: instantSchema,
});
export type Trial = z.infer<typeof trialSchema>;

export const trialsSchema = z.object({
  trials: z.array(trialSchema),
  /** Smallest global p of all. */
  smallestP: numberOrNull,
  /** Probability that the smallest of as many looks is that small without a signal; null without any look that ended. */
  globalP: numberOrNull,
  /** Nulls that the looks share. */
  nulls: z.number().int(),
  method: z.enum(['none', 'same-nulls', 'bonferroni']),
  /** How it was come by, in a sentence. */
  statement: z.string(),
});
export type Trials = z.infer<typeof trialsSchema>;
