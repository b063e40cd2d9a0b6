import { fileParts } from './measurements';
import { z } from 'zod';
import { idSchema, instantSchema, numberOrNull, sha256Schema } from './shared';
import { fitStatusSchema, likelihoodSchema, cutsSchema } from './notebooks';
import { spectrumSchema } from './measurements';
import { priorSchema } from './priors';

export const defaultFit = { replicas: 4, maxDraws: 20_000, rhat: 1.01, ess: 400 } as const;

export const startFitSchema = z.strictObject({
  /** Master seed; drawn by the server where left out. */
  seed: z.union([z.string().min(1).max(200), z.number().int().min(0)]).optional(),
  replicas: z.number().int().min(2).max(16).optional(),
  /** Kept draws a replica after warm-up. */
  maxDraws: z.number().int().min(100).max(1_000_000).optional(),
  target: z
    .strictObject({
      rhat: z.number().gt(1).optional(),
      ess: z.number().positive().max(1e9).optional(),
    })
    .optional(),
});
export type StartFit = z.infer<typeof startFitSchema>;

/** Additional kept draws a replica: beyond those that an ended fit has, or a running one is allowed. */
export const extendFitSchema = z.strictObject({ draws: z.number().int().min(1).max(1_000_000) });
export type ExtendFit = z.infer<typeof extendFitSchema>;

/** Everything that determines the draws: no id, no time, no name of a person. Its SHA-256 is of its canonical JSON. */
export const snapshotSchema = z.object({
  inputs: z.array(z.object({ part: z.enum(fileParts), sha256: sha256Schema })),
  measurementVersion: z.number().int(),
  /** Which columns of the file are what. */
  mapping: z.record(z.string(), z.unknown()),
  /** What the bispectrum of the file was turned into S by; absent where the file gives S. */
  spectrum: spectrumSchema.optional(),
  cuts: cutsSchema,
  likelihood: likelihoodSchema,
  mockCount: z.number().int().nullable(),
  /** Further measurements that are fitted with it; absent where there are none. */
  also: z
    .array(
      z.object({
        inputs: z.array(z.object({ part: z.enum(fileParts), sha256: sha256Schema })),
        measurementVersion: z.number().int(),
        mapping: z.record(z.string(), z.unknown()),
        spectrum: spectrumSchema.optional(),
        cuts: cutsSchema,
        mockCount: z.number().int().nullable(),
      }),
    )
    .optional(),
  /** Present where row i of everyone's mocks is of one simulated sky. */
  sharedMocks: z.literal(true).optional(),
  template: z.object({
    id: z.string(),
    version: z.number().int(),
    options: z.record(z.string(), z.unknown()),
  }),
  priors: z.record(z.string(), priorSchema),
  seed: z.string(),
  replicas: z.number().int(),
  warmup: z.number().int(),
  blockDraws: z.number().int(),
  /** How the sampler goes about it; absent in fits from before it was written down. */
  sampler: z
    .object({
      version: z.number().int(),
      walkEvery: z.number().int(),
      differential: z.boolean(),
      ladder: z.object({
        everyInWarmup: z.number().int(),
        every: z.number().int(),
        everyWhereJumpsDo: z.number().int(),
        maxRungs: z.number().int(),
        rejection: z.number(),
      }),
    })
    .optional(),
  program: z.string(),
  node: z.string(),
  architecture: z.string(),
});
export type Snapshot = z.infer<typeof snapshotSchema>;

export const diagnosticSchema = z.object({
  parameter: z.string(),
  /** True for what is computed from the parameters (m/H, weights). */
  derived: z.boolean(),
  mean: numberOrNull,
  sd: numberOrNull,
  q2_5: numberOrNull,
  q16: numberOrNull,
  q50: numberOrNull,
  q84: numberOrNull,
  q97_5: numberOrNull,
  rhat: numberOrNull,
  essBulk: numberOrNull,
  essTail: numberOrNull,
  mcseMean: numberOrNull,
  mcseSd: numberOrNull,
});
export type Diagnostic = z.infer<typeof diagnosticSchema>;

/** ln of the evidence, with its standard error and the error's degrees of freedom. */
export const evidenceSchema = z.object({ value: z.number(), error: z.number(), dof: z.number() });

/** The ladder of temperatures, all replicas together. */
export const ladderSchema = z.object({
  /** Rungs of the longest, both ends counted. */
  rungs: z.number().int(),
  /** Ways from the posterior to the prior and back. */
  roundTrips: z.number().int(),
  /** True where the jumps move the chains and give the evidence, so that the ladder is advanced seldom. */
  rests: z.boolean(),
});

/** An interval of masses between minima of the collapsed density: its share of the draws, and of the posterior by the scan or the independent run. */
export const modeSchema = z.object({
  mu: z.array(z.number()),
  lo: z.array(z.number()),
  hi: z.array(z.number()),
  weight: numberOrNull,
  mcse: numberOrNull,
  /** Null where its error is above 0.02. */
  scanWeight: numberOrNull,
});
export type Mode = z.infer<typeof modeSchema>;

/** The masses of every mode, by name, and where `scanWeight` comes from: a scan, or an independent cold run of chains. */
export const modesOfSchema = z.object({ by: z.enum(['scan', 'run']), names: z.array(z.string()) });

export const fitSchema = z.object({
  id: idSchema,
  notebookId: idSchema,
  number: z.number().int(),
  revision: z.number().int(),
  status: fitStatusSchema,
  /** What happened, in words, where it isn't plain: why it failed, that it waits for a worker. */
  message: z.string().nullable(),
  progress: z.object({
    /** Warm-up draws made and wanted, then kept draws made and allowed, each a replica. */
    warmup: z.number().int(),
    warmupTotal: z.number().int(),
    draws: z.number().int(),
    maxDraws: z.number().int(),
    /** 0 to 1: the greater of draws/maxDraws and the way to the gate. */
    fraction: z.number(),
    /** Estimated seconds to the end; null before there is a rate, 0 at the end. */
    secondsLeft: numberOrNull,
    /** Seconds of sampling so far, interruptions left out. */
    secondsSpent: z.number(),
  }),
  /** Where it stands while it waits for its turn; the reason in words is the message. Null where it doesn't wait. */
  queue: z
    .object({
      /** Counted from 1, over all groups. */
      place: z.number().int(),
      /** Fits of its group that run, and how many may. */
      groupRunning: z.number().int(),
      groupLimit: z.number().int(),
    })
    .nullable(),
  replicas: z.number().int(),
  /** Recorded draws a second, all replicas together; null before the first block. */
  drawsPerSecond: numberOrNull,
  /** Each move's share of proposals accepted, and of the time; the ladder's time is all under its swaps. */
  acceptance: z.array(z.object({ move: z.string(), rate: numberOrNull, share: numberOrNull })),
  ladder: ladderSchema.nullable(),
  diagnostics: z.array(diagnosticSchema),
  /** R-hat and ESS as they were after each block, for the small figures. */
  history: z.array(
    z.object({ draws: z.number().int(), rhat: z.array(numberOrNull), ess: z.array(numberOrNull) }),
  ),
  modes: z.array(modeSchema),
  /** Null before modes are compared. */
  modesOf: modesOfSchema.nullable(),
  logEvidence: evidenceSchema.nullable(),
  /** Why there is no evidence, to follow "because"; null where there is one. */
  noEvidence: z.string().nullable(),
  gate: z.object({
    met: z.boolean(),
    target: z.object({ rhat: z.number(), ess: z.number() }),
    reasons: z.array(z.string()),
  }),
  snapshot: snapshotSchema.extend({ sha256: sha256Schema }),
  startedBy: z.string(),
  createdAt: instantSchema,
  startedAt: instantSchema.nullable(),
  endedAt: instantSchema.nullable(),
  /** When draws or a report were last committed, by the database's clock; null before the first. */
  committedAt: instantSchema.nullable(),
  may: z.array(z.string()),
});
export type Fit = z.infer<typeof fitSchema>;

/** What changes while a fit runs: the payload of one event of `GET /fits/:id/events` (event name `fit`). */
export const fitEventSchema = fitSchema.pick({
  id: true,
  status: true,
  message: true,
  progress: true,
  queue: true,
  drawsPerSecond: true,
  acceptance: true,
  ladder: true,
  diagnostics: true,
  history: true,
  modes: true,
  modesOf: true,
  logEvidence: true,
  noEvidence: true,
  gate: true,
  startedAt: true,
  endedAt: true,
  committedAt: true,
  may: true,
});
export type FitEvent = z.infer<typeof fitEventSchema>;

/**
 * Draws for figures: `GET /fits/:id/draws?max=20000`. Every k-th stored draw, warm-up included and marked;
 * values by column name, rounded to 7 significant digits. The full precision is in the sample file.
 */
export const drawsSchema = z.object({
  replicas: z.number().int(),
  /** Step between the draws given, in recorded draws. */
  stride: z.number().int(),
  replica: z.array(z.number().int()),
  draw: z.array(z.number().int()),
  warmup: z.array(z.number().int()),
  logLikelihood: z.array(z.number()),
  columns: z.record(z.string(), z.array(z.number())),
});
export type Draws = z.infer<typeof drawsSchema>;

export const drawsFormats = ['json', 'float32'] as const;

/** Head of the packed draws (`format=float32`). */
export const drawsHeadSchema = z.object({
  replicas: z.number().int(),
  stride: z.number().int(),
  /** Recorded draws below this one are of warm-up. */
  warmup: z.number().int(),
  /** Rows of each replica. */
  rows: z.array(z.number().int()),
  columns: z.array(z.string()),
});
export type DrawsHead = z.infer<typeof drawsHeadSchema>;

export const sampleFormats = ['csv', 'ecsv', 'parquet', 'npz'] as const;
export type SampleFormat = (typeof sampleFormats)[number];

export const manifestSchema = z.object({
  fit: z.object({ number: z.number().int(), status: fitStatusSchema }),
  snapshot: snapshotSchema,
  snapshotSha256: sha256Schema,
  inputs: z.array(
    z.object({
      part: z.enum(fileParts),
      /** Which measurement it is of, from 1; absent where there is a single one. */
      measurement: z.number().int().optional(),
      fileName: z.string(),
      bytes: z.number().int(),
      sha256: sha256Schema,
    }),
  ),
  outputs: z.array(z.object({ name: z.string(), bytes: z.number().int(), sha256: sha256Schema })),
  seeds: z.object({ master: z.string(), replicas: z.array(z.string()) }),
  versions: z.object({ program: z.string(), node: z.string(), architecture: z.string() }),
  howToRunAgain: z.array(z.string()),
});
export type Manifest = z.infer<typeof manifestSchema>;
