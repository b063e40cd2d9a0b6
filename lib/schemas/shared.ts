import { z } from 'zod';

/** Vocabulary that several request bodies and answers share. Safe for the browser. */

export const roles = ['lead', 'analyst', 'referee', 'reader'] as const;
export const roleSchema = z.enum(roles);
export type Role = z.infer<typeof roleSchema>;

export const idSchema = z.uuid();

/** An instant, ISO 8601 in UTC. */
export const instantSchema = z.iso.datetime();

export const sha256Schema = z.string().regex(/^[0-9a-f]{64}$/);

/** JSON has no NaN or infinity: a number that may have no value is null. */
export const numberOrNull = z.number().nullable();

export const createdSchema = z.object({ id: idSchema });

export const errorCodes = [
  'bad_request',
  'unauthenticated',
  'forbidden',
  'not_found',
  'conflict',
  'stale_revision',
  'plan_missing',
  'blind',
  'too_large',
  'unsupported_media_type',
  'invalid',
  'too_many_requests',
  'unavailable',
  'internal',
] as const;
export type ErrorCode = (typeof errorCodes)[number];

export const errorDetailSchema = z.object({
  path: z.string().optional(),
  line: z.number().int().optional(),
  column: z.number().int().optional(),
  message: z.string(),
});
export type ErrorDetail = z.infer<typeof errorDetailSchema>;

export const errorBodySchema = z.object({
  error: z.object({
    code: z.enum(errorCodes),
    message: z.string(),
    details: z.array(errorDetailSchema),
  }),
});
export type ErrorBody = z.infer<typeof errorBodySchema>;
