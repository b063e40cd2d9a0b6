import { z } from 'zod';
import { diagnosticSchema, evidenceSchema, ladderSchema, modeSchema, modesOfSchema } from './fits';
import { widthCurveSchema } from './comparison';
import { numberOrNull } from './shared';

/** What is kept of the looks at a fit; column `report`. Every number is of committed draws. */
export const storedReportSchema = z.object({
  /** Recorded draws a replica at the last look; the diagnostics are of those. */
  draws: z.number().int(),
  diagnostics: z.array(diagnosticSchema),
  history: z.array(
    z.object({ draws: z.number().int(), rhat: z.array(numberOrNull), ess: z.array(numberOrNull) }),
  ),
  gate: z.object({ met: z.boolean(), reasons: z.array(z.string()) }),
  /** Kept draws a replica at which the gate is expected to be met, as it was told last; null where that can't be told. */
  wanted: numberOrNull,
  /** What that is told from, since the last look: the median of what is expected. */
  estimate: numberOrNull.default(null),
  /** Moves of all replicas together, since the end of warm-up (during it: since the start). */
  acceptance: z.array(z.object({ move: z.string(), rate: numberOrNull, share: numberOrNull.default(null) })),
  ladder: ladderSchema.nullable().default(null),
  logEvidence: evidenceSchema.nullable().default(null),
  /** Why there is no evidence, to follow "because"; null where there is one. */
  noEvidence: z.string().nullable().default(null),
  /** Empty before the first look, and where there is no scan to compare with. */
  modes: z.array(modeSchema).default([]),
  modesOf: modesOfSchema.nullable().default(null),
  /** How the evidence hangs on the width of the amplitudes' prior; of the look that ended the fit, where it has one. */
  widths: widthCurveSchema.nullable().default(null),
});
export type StoredReport = z.infer<typeof storedReportSchema>;

export const emptyReport: StoredReport = {
  draws: 0,
  diagnostics: [],
  history: [],
  gate: { met: false, reasons: ['No draw is kept yet: the replicas are warming up.'] },
  wanted: null,
  estimate: null,
  acceptance: [],
  ladder: null,
  logEvidence: null,
  noEvidence: 'no draw is kept yet',
  modes: [],
  modesOf: null,
  widths: null,
};
