import { z } from 'zod';
import { idSchema, instantSchema, roleSchema } from './shared';
import { measurementSummarySchema } from './measurements';
import { notebookSummarySchema } from './notebooks';

export const healthSchema = z.object({
  status: z.enum(['ok', 'degraded']),
  database: z.enum(['ok', 'away']),
  queue: z.enum(['ok', 'away']),
  storage: z.enum(['ok', 'away']),
  /** Live worker processes. */
  workers: z.number().int(),
  version: z.string(),
});
export type Health = z.infer<typeof healthSchema>;

export const meSchema = z.object({
  id: idSchema,
  email: z.email(),
  groups: z.array(z.object({ id: idSchema, name: z.string(), role: roleSchema })),
});
export type Me = z.infer<typeof meSchema>;

export const groupNameSchema = z.string().trim().min(1).max(120);
export const createGroupSchema = z.strictObject({ name: groupNameSchema });
export const renameGroupSchema = z.strictObject({ name: groupNameSchema });

/** A group by its name alone. */
export const groupNamedSchema = z.object({ id: idSchema, name: z.string() });
export type GroupNamed = z.infer<typeof groupNamedSchema>;

export const inviteSchema = z.strictObject({
  email: z
    .email()
    .max(254)
    .transform((email) => email.toLowerCase()),
  role: roleSchema,
});

export const changeRoleSchema = z.strictObject({ role: roleSchema });

export const memberSchema = z.object({
  userId: idSchema,
  email: z.email(),
  role: roleSchema,
  /** When the membership began. */
  since: instantSchema,
});
export type Member = z.infer<typeof memberSchema>;

/** An invitation that its address hasn't answered by signing in yet. */
export const invitationSchema = z.object({
  id: idSchema,
  email: z.email(),
  role: roleSchema,
  createdAt: instantSchema,
  /** When its mail last went out; null where it couldn't be sent. */
  sentAt: instantSchema.nullable(),
});
export type Invitation = z.infer<typeof invitationSchema>;

/** A group's home: its notebooks and measurements as the asking member may see them. */
export const groupSchema = z.object({
  id: idSchema,
  name: z.string(),
  role: roleSchema,
  may: z.array(z.string()),
  members: z.array(memberSchema),
  /** Those still open, for whoever may invite; nobody else sees whom a group waits for. */
  invitations: z.array(invitationSchema),
  notebooks: z.array(notebookSummarySchema),
  measurements: z.array(measurementSummarySchema),
  createdAt: instantSchema,
});
export type Group = z.infer<typeof groupSchema>;
