import { z } from 'zod';
import { idSchema, instantSchema, numberOrNull, sha256Schema } from './shared';

/** Limits of one upload, in bytes. */
export const pointsLimit = 5 * 1024 * 1024;
export const mocksLimit = 64 * 1024 * 1024;

const columnRef = z.union([z.string().min(1), z.number().int().min(0)]);

export const columnMappingSchema = z.strictObject({
  kappa: columnRef.optional(),
  kappaLo: columnRef.optional(),
  kappaHi: columnRef.optional(),
  kLong: columnRef.optional(),
  kShort: columnRef.optional(),
  k1: columnRef.optional(),
  k2: columnRef.optional(),
  k3: columnRef.optional(),
  S: columnRef.optional(),
  B: columnRef.optional(),
  sigma: columnRef.optional(),
});

const unitText = z.string().trim().min(1).max(40);

/** The power spectrum by which a bispectrum B becomes S; what is missing or can't be is said by the preflight. */
export const powerSpectrumSchema = z.strictObject({
  /** A_s, dimensionless, at the pivot. */
  amplitude: z.number().optional(),
  /** n_s; 1 for none. */
  tilt: z.number().optional(),
  pivot: z.number().optional(),
  pivotUnit: unitText.optional(),
  /** Where the file doesn't say them: `1/Mpc` or `h/Mpc`, `Mpc^6` or `(Mpc/h)^6`. */
  wavenumberUnit: unitText.optional(),
  bispectrumUnit: unitText.optional(),
  h: z.number().optional(),
});

/** The same as it was used, units and all; null for what wasn't needed. */
export const spectrumSchema = z.object({
  amplitude: z.number(),
  tilt: z.number(),
  pivot: z.number().nullable(),
  pivotUnit: z.string().nullable(),
  wavenumberUnit: z.string(),
  bispectrumUnit: z.string(),
  h: z.number().nullable(),
});
export type Spectrum = z.infer<typeof spectrumSchema>;

/** Values that simulated data were made with, by name of the parameter or derived quantity. */
export const truthSchema = z
  .record(z.string().regex(/^[A-Za-z]\w{0,63}$/, 'is no name of a parameter'), z.number())
  .refine((truth) => Object.keys(truth).length <= 64, 'names more than 64 parameters');

/** The JSON part `meta` of an upload. */
export const uploadMetaSchema = z.strictObject({
  name: z.string().trim().min(1).max(120).optional(),
  description: z.string().trim().max(2000).optional(),
  columns: columnMappingSchema.optional(),
  spectrum: powerSpectrumSchema.optional(),
  /** Number of mocks behind an uploaded covariance. */
  mockCount: z.number().int().min(3).optional(),
  simulated: z.boolean().optional(),
  /** Of simulated data: what was put in, by parameter. Drawn over posteriors; withheld while blind. */
  truth: truthSchema.optional(),
  blind: z.boolean().optional(),
});
export type UploadMeta = z.infer<typeof uploadMetaSchema>;

/** The files that an upload may have. */
export const fileParts = ['file', 'covariance', 'mocks', 'window', 'columns', 'theoryCovariance'] as const;
export type FilePart = (typeof fileParts)[number];

export const checkSchema = z.object({
  code: z.string(),
  level: z.enum(['error', 'warning', 'note', 'ok']),
  message: z.string(),
  remedy: z.string().optional(),
  part: z.enum(fileParts).optional(),
  line: z.number().int().optional(),
  column: z.number().int().optional(),
});
export type Check = z.infer<typeof checkSchema>;

export const covarianceSources = ['file', 'mocks', 'errors'] as const;

/** Answer to an upload, and the head of `GET /measurements/:id`. */
export const measurementCreatedSchema = z.object({
  id: idSchema,
  version: z.number().int(),
  blind: z.boolean(),
  rows: z.number().int(),
  kappaMin: z.number(),
  kappaMax: z.number(),
  hasBinEdges: z.boolean(),
  sha256: sha256Schema,
  checks: z.array(checkSchema),
});
export type MeasurementCreated = z.infer<typeof measurementCreatedSchema>;

export const measurementSummarySchema = z.object({
  id: idSchema,
  name: z.string(),
  description: z.string(),
  version: z.number().int(),
  blind: z.boolean(),
  simulated: z.boolean(),
  rows: z.number().int(),
  kappaMin: z.number(),
  kappaMax: z.number(),
  covarianceSource: z.enum(covarianceSources),
  mockCount: z.number().int().nullable(),
  /** Notebooks that rest on any version of it. */
  notebooks: z.number().int(),
  uploadedBy: z.string(),
  uploadedAt: instantSchema,
});
export type MeasurementSummary = z.infer<typeof measurementSummarySchema>;

/** A measurement in the list of its group's, with its points for a small figure. */
export const measurementListedSchema = measurementSummarySchema.extend({
  checks: z.object({ warnings: z.number().int(), passed: z.number().int() }),
  points: z.object({ kappa: z.array(z.number()), S: z.array(numberOrNull), sigma: z.array(z.number()) }),
});
export type MeasurementListed = z.infer<typeof measurementListedSchema>;

/** One stored file of a measurement. */
export const storedFileSchema = z.object({
  part: z.enum(fileParts),
  fileName: z.string(),
  bytes: z.number().int(),
  sha256: sha256Schema,
});

/** One version of a measurement in the list of its versions. */
export const measurementVersionSchema = z.object({
  version: z.number().int(),
  rows: z.number().int(),
  kappaMin: z.number(),
  kappaMax: z.number(),
  covarianceSource: z.enum(covarianceSources),
  mockCount: z.number().int().nullable(),
  sha256: sha256Schema,
  uploadedBy: z.string(),
  uploadedAt: instantSchema,
  /** Fits that were made on it, of whichever notebook. */
  fits: z.number().int(),
});
export type MeasurementVersionLine = z.infer<typeof measurementVersionSchema>;

/** A notebook that rests on a measurement. */
export const restingNotebookSchema = z.object({
  id: idSchema,
  number: z.number().int(),
  title: z.string(),
  version: z.number().int(),
});
export type RestingNotebook = z.infer<typeof restingNotebookSchema>;

/** Which version is asked for; left out, the newest. */
export const versionQuerySchema = z.object({ version: z.coerce.number<string>().int().min(1).optional() });

export const patchMeasurementSchema = z
  .strictObject({
    name: z.string().trim().min(1).max(120).optional(),
    description: z.string().trim().max(2000).optional(),
  })
  .refine(({ name, description }) => name !== undefined || description !== undefined, {
    message: 'Give a name, a description, or both.',
  });
export type PatchMeasurement = z.infer<typeof patchMeasurementSchema>;

/** What was deleted: a whole measurement, or one version of it. */
export const measurementDeletedSchema = z.object({ id: idSchema, version: z.number().int().nullable() });
export type MeasurementDeleted = z.infer<typeof measurementDeletedSchema>;

/** The correlation of a version's bins: below the diagonal, row by row, i(i − 1)/2 + j for j < i, to five decimals. */
export const correlationSchema = z.object({
  version: z.number().int(),
  rows: z.number().int(),
  /** False where only errors were given: then every value is 0. */
  correlated: z.boolean(),
  mockCount: z.number().int().nullable(),
  kappa: z.array(z.number()),
  values: z.array(z.number()),
});
export type Correlation = z.infer<typeof correlationSchema>;

/** Window, columns and theory covariance of a measurement. Rows are in ascending κ. */
export const measurementTheorySchema = z.object({
  window: z
    .object({
      /** Edges of the theory bins; null where the theory is evaluated at points. */
      kappaLo: z.array(z.number()).nullable(),
      kappaHi: z.array(z.number()).nullable(),
      kappa: z.array(z.number()),
      /** One row a bin of the measurement; null above 40,000 numbers. */
      matrix: z.array(z.array(z.number())).nullable(),
    })
    .nullable(),
  columns: z.array(z.object({ name: z.string(), values: z.array(z.number()) })),
  /** Square roots of the theory covariance's diagonal; null without one. */
  sigma: z.array(z.number()).nullable(),
  covariance: z.array(z.array(z.number())).nullable(),
});
export type MeasurementTheory = z.infer<typeof measurementTheorySchema>;

export const measurementSchema = measurementSummarySchema.extend({
  groupId: idSchema,
  sha256: sha256Schema,
  hasBinEdges: z.boolean(),
  /** The newest version; `version` is the one that is shown. */
  newest: z.number().int(),
  /** Every version that there is, newest first. */
  versions: z.array(measurementVersionSchema),
  /** Notebooks that rest on it, with the version that each rests on. */
  resting: z.array(restingNotebookSchema),
  /** What the bispectrum of the file was turned into S by; null where the file gives S. */
  spectrum: spectrumSchema.nullable(),
  /** What simulated data were made with; null where nothing is known, and while blind. */
  truth: z.record(z.string(), z.number()).nullable(),
  files: z.array(storedFileSchema),
  checks: z.array(checkSchema),
  /** The points, ascending in κ; `S` is null for each while blind. `sigma` = √ of the covariance's diagonal. */
  points: z.object({
    kappa: z.array(z.number()),
    kappaLo: z.array(z.number()).nullable(),
    kappaHi: z.array(z.number()).nullable(),
    S: z.array(numberOrNull),
    sigma: z.array(z.number()),
  }),
  /** Sample or given covariance, row by row; for χ² in the browser. Null above 200 bins. */
  covariance: z.array(z.array(z.number())).nullable(),
  /** How theory becomes the data, where files of the upload say so; null where none does. */
  theory: measurementTheorySchema.nullable(),
  may: z.array(z.string()),
});
export type Measurement = z.infer<typeof measurementSchema>;
