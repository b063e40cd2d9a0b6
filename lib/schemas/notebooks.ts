import { notebookSections } from './notebook-sections';
import { z } from 'zod';
import { idSchema, instantSchema } from './shared';
import { priorSchema, priorsSchema } from './priors';
import { statementTextSchema } from './statements';
import { templateChoiceSchema } from './templates';

export const likelihoodKinds = ['normal', 'hartlap', 'sellentin-heavens', 'matched-t'] as const;
export const likelihoodSchema = z.strictObject({ kind: z.enum(likelihoodKinds) });

/** A bin left out: its number in ascending κ, from 1, and why. `kappa`, its edges, is what it is known by in another version. */
export const excludedBinSchema = z.strictObject({
  bin: z.number().int().min(1),
  reason: z
    .string()
    .trim()
    .min(1, 'Say why the bin is left out.')
    .max(200, 'Say it in at most 200 characters.'),
  kappa: z.tuple([z.number().positive(), z.number().positive()]).optional(),
});
export type ExcludedBin = z.infer<typeof excludedBinSchema>;

export const cutsSchema = z.strictObject({
  kappaMin: z.number().positive().optional(),
  kappaMax: z.number().positive().optional(),
  excluded: z.array(excludedBinSchema).max(500).optional(),
});

export const titleSchema = z.string().trim().min(1).max(160);

/** Most measurements of one notebook. */
export const mostMeasurements = 4;

/** A further measurement that is fitted with the notebook's own; without a version the one that stands there, or the newest. */
export const alsoMeasurementSchema = z.strictObject({
  measurement: idSchema,
  version: z.number().int().min(1).optional(),
  cuts: cutsSchema.optional(),
});
export type AlsoMeasurement = z.infer<typeof alsoMeasurementSchema>;
const alsoMeasurementsSchema = z
  .array(alsoMeasurementSchema)
  .max(mostMeasurements - 1, `A notebook has at most ${mostMeasurements} measurements.`);

/** Further measurements as settings have them: by the id of the version. */
export const alsoShape = {
  also: z.array(z.object({ version: idSchema, cuts: cutsSchema })).optional(),
  sharedMocks: z.literal(true).optional(),
};

export const createNotebookSchema = z.strictObject({
  title: titleSchema,
  measurement: idSchema,
  cuts: cutsSchema.optional(),
  alsoMeasurements: alsoMeasurementsSchema.optional(),
  /** Whether row i of everyone's mocks is of one simulated sky. */
  sharedMocks: z.boolean().optional(),
  likelihood: likelihoodSchema.optional(),
  template: templateChoiceSchema,
  priors: priorsSchema.optional(),
});
export type CreateNotebook = z.infer<typeof createNotebookSchema>;

/** Names the revision that it edits; what is left out stays as it is. Priors are replaced whole by name. */
export const patchNotebookSchema = z.strictObject({
  revision: z.number().int().min(1),
  title: titleSchema.optional(),
  cuts: cutsSchema.optional(),
  /** Replaced whole; one that stands already keeps its version and cuts unless others are given. */
  alsoMeasurements: alsoMeasurementsSchema.optional(),
  sharedMocks: z.boolean().optional(),
  likelihood: likelihoodSchema.optional(),
  template: templateChoiceSchema.optional(),
  priors: priorsSchema.optional(),
  statement: statementTextSchema.optional(),
});
export type PatchNotebook = z.infer<typeof patchNotebookSchema>;

export const notebookCreatedSchema = z.object({
  id: idSchema,
  revision: z.number().int(),
  blind: z.boolean(),
});
export type NotebookCreated = z.infer<typeof notebookCreatedSchema>;

export const fitStatuses = [
  'queued',
  'warming-up',
  'sampling',
  'converged',
  'stopped',
  'budget-spent',
  'failed',
] as const;
export const fitStatusSchema = z.enum(fitStatuses);
export type FitStatus = z.infer<typeof fitStatusSchema>;
export const endedStatuses: readonly FitStatus[] = ['converged', 'stopped', 'budget-spent', 'failed'];

/** Settings of the revision that stands, or of a fit's snapshot; on the same measurement or the newest version of another. */
export const copyNotebookSchema = z.strictObject({
  title: titleSchema.optional(),
  measurement: idSchema.optional(),
  fit: idSchema.optional(),
});
export type CopyNotebook = z.infer<typeof copyNotebookSchema>;

/** Names the revision that stands, as a PATCH does. */
export const restoreRevisionSchema = z.strictObject({ revision: z.number().int().min(1) });
export type RestoreRevision = z.infer<typeof restoreRevisionSchema>;

export const originSchema = z.object({
  number: z.number().int(),
  title: z.string(),
  revision: z.number().int(),
  fit: z.number().int().nullable(),
  /** Bins left out there that the measurement it was copied to hasn't got. */
  droppedBins: z.number().int().optional(),
});

/** A line about a fit in a notebook. */
export const fitSummarySchema = z.object({
  id: idSchema,
  number: z.number().int(),
  status: fitStatusSchema,
  /** Revision of the notebook that it froze. */
  revision: z.number().int(),
  startedBy: z.string(),
  createdAt: instantSchema,
  endedAt: instantSchema.nullable(),
});
export type FitSummary = z.infer<typeof fitSummarySchema>;

export const notebookSummarySchema = z.object({
  id: idSchema,
  number: z.number().int(),
  title: z.string(),
  revision: z.number().int(),
  /** The last revision that changed what a fit freezes. */
  settledRevision: z.number().int(),
  measurementId: idSchema,
  measurementName: z.string(),
  /** The version that it rests on. */
  measurementVersion: z.number().int(),
  /** Further measurements that are fitted with it. */
  also: z.array(z.object({ id: idSchema, name: z.string(), version: z.number().int() })),
  templateId: z.string(),
  fields: z.number().int(),
  blind: z.boolean(),
  simulated: z.boolean(),
  lastFit: fitSummarySchema.nullable(),
  /** The last fit that came to its own end, for a figure of what it found. */
  finishedFit: idSchema.nullable(),
  updatedBy: z.string(),
  updatedAt: instantSchema,
  archivedAt: instantSchema.nullable(),
});
export type NotebookSummary = z.infer<typeof notebookSummarySchema>;

/** What a revision settles: everything that a fit freezes of the notebook. */
export const settingsShape = {
  cuts: cutsSchema,
  likelihood: likelihoodSchema,
  template: z.object({
    id: z.string(),
    version: z.number().int(),
    options: z.record(z.string(), z.unknown()),
  }),
  /** One for every parameter of the template. */
  priors: z.record(z.string(), priorSchema),
};

/** An earlier or the standing revision, to be read. */
export const revisionSchema = z.object({
  revision: z.number().int(),
  title: z.string(),
  by: z.string(),
  at: instantSchema,
  sections: z.array(z.enum(notebookSections)),
  restoredFrom: z.number().int().nullable(),
  ...settingsShape,
  /** Further measurements as they were then; those that have been deleted since have no name. */
  also: z.array(
    z.object({ name: z.string().nullable(), version: z.number().int().nullable(), cuts: cutsSchema }),
  ),
  sharedMocks: z.boolean(),
  /** The group's words as they stood then, with references for their numbers. */
  statement: z.string(),
});
export type Revision = z.infer<typeof revisionSchema>;

export const alsoMeasuredSchema = z.object({
  id: idSchema,
  name: z.string(),
  version: z.number().int(),
  newest: z.number().int(),
  cuts: cutsSchema,
  bins: z.object({ kept: z.number().int(), all: z.number().int() }),
});
export type AlsoMeasured = z.infer<typeof alsoMeasuredSchema>;

export const notebookSchema = z.object({
  id: idSchema,
  number: z.number().int(),
  groupId: idSchema,
  groupName: z.string(),
  title: z.string(),
  revision: z.number().int(),
  blind: z.boolean(),
  simulated: z.boolean(),
  measurement: z.object({
    id: idSchema,
    name: z.string(),
    /** The version that it rests on, and the newest that there is. */
    version: z.number().int(),
    newest: z.number().int(),
  }),
  ...settingsShape,
  /** Bins kept by the cuts, of all. */
  bins: z.object({ kept: z.number().int(), all: z.number().int() }),
  /** Further measurements that are fitted with it, in the order in which parameters of their own are numbered from 2. */
  also: z.array(alsoMeasuredSchema),
  sharedMocks: z.boolean(),
  /** The group's words as they are typed; empty where none were written. */
  statement: z.string(),
  /** Who settled which section when: for the record in the margin. */
  record: z.array(
    z.object({
      revision: z.number().int(),
      by: z.string(),
      at: instantSchema,
      sections: z.array(z.enum(notebookSections)),
      restoredFrom: z.number().int().nullable(),
    }),
  ),
  fits: z.array(fitSummarySchema),
  createdBy: z.string(),
  createdAt: instantSchema,
  /** What it was copied from. */
  origin: originSchema.nullable(),
  /** While it is put away it is read and nothing else. */
  archived: z.object({ by: z.string(), at: instantSchema }).nullable(),
  /** Actions that the asking person may take: `notebook.edit`, `fit.start`, `fit.stop` … */
  may: z.array(z.string()),
});
export type Notebook = z.infer<typeof notebookSchema>;

/** Who has the notebook open, besides the one who asks; each person once. */
export const presenceSchema = z.object({ others: z.array(z.string()) });
export type Presence = z.infer<typeof presenceSchema>;
