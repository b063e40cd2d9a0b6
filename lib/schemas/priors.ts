import { z } from 'zod';

const finite = z.number();

/** One prior; the inference checks it against the template (ranges, order, isotropic on a whole set of angles). */
export const priorSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('uniform'), lo: finite, hi: finite }),
  z.strictObject({ kind: z.literal('log-uniform'), lo: finite, hi: finite }),
  z.strictObject({ kind: z.literal('normal'), mean: finite, sd: finite }),
  z.strictObject({ kind: z.literal('half-normal'), sd: finite }),
  z.strictObject({ kind: z.literal('truncated-normal'), mean: finite, sd: finite, lo: finite, hi: finite }),
  z.strictObject({ kind: z.literal('fixed'), value: finite }),
  z.strictObject({ kind: z.literal('isotropic') }),
]);

export const priorsSchema = z.record(z.string(), priorSchema);
