import { z } from 'zod';
import { statementLimit } from '@/lib/statement/parse-statement';
import { idSchema, instantSchema, sha256Schema } from './shared';

/** The words as they are typed: paragraphs apart by an empty line, references in braces. */
export const statementTextSchema = z.string().max(statementLimit);

export const statementPieceSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('text'), text: z.string() }),
  z.object({
    kind: z.literal('value'),
    /** As it is typed. */
    reference: z.string(),
    /** What it is, in words: "median of mass 1 with its 68 % interval". */
    label: z.string(),
    /** Null where there is none; `because` says why. */
    value: z.string().nullable(),
    because: z.string().nullable(),
    fit: z.object({
      id: idSchema.nullable(),
      number: z.number().int(),
      revision: z.number().int().nullable(),
    }),
    /** What limits it: settings changed since the fit froze them; the fit ended without meeting its gate. */
    marks: z.array(z.enum(['earlier-revision', 'not-converged'])),
  }),
]);
export type StatementPiece = z.infer<typeof statementPieceSchema>;

export const statementFaultSchema = z.object({
  line: z.number().int(),
  column: z.number().int(),
  message: z.string(),
});

export const typesetStatementSchema = z.object({
  paragraphs: z.array(z.array(statementPieceSchema)),
  /** References that can't be read or that name nothing; a statement with one isn't stored. */
  faults: z.array(statementFaultSchema),
  /** Fits that it refers to, in the order of their numbers. */
  fits: z.array(
    z.object({ id: idSchema, number: z.number().int(), revision: z.number().int(), sha256: sha256Schema }),
  ),
});
export type TypesetStatement = z.infer<typeof typesetStatementSchema>;

const written = z.object({ revision: z.number().int(), by: z.string(), at: instantSchema });

export const statementSchema = typesetStatementSchema.extend({
  text: z.string(),
  /** Who wrote these words and in which revision; null where none were written yet. */
  written: written.nullable(),
  /** Every revision that changed the words, the newest first. */
  history: z.array(written),
});
export type Statement = z.infer<typeof statementSchema>;

/** `?revision=3` gives the words as they stood then; left out, as they stand. */
export const statementQuerySchema = z.object({ revision: z.coerce.number<string>().int().min(1).optional() });

export const typesetBodySchema = z.strictObject({ text: statementTextSchema });
