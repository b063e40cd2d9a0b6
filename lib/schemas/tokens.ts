import { z } from 'zod';
import { idSchema, instantSchema } from './shared';

export const createTokenSchema = z.strictObject({ name: z.string().trim().min(1).max(120) });

/** A personal token without its secret, which nobody can read again. */
export const tokenSchema = z.object({
  id: idSchema,
  name: z.string(),
  createdAt: instantSchema,
  /** To the minute; null where it never was. */
  lastUsedAt: instantSchema.nullable(),
  revokedAt: instantSchema.nullable(),
});
export type Token = z.infer<typeof tokenSchema>;

/** The answer to making one: the only place where the secret stands. */
export const tokenCreatedSchema = z.object({ id: idSchema, token: z.string() });
export type TokenCreated = z.infer<typeof tokenCreatedSchema>;
