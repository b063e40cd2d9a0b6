import { z } from 'zod';
import { idSchema, instantSchema } from './shared';

/** Kinds of events that a group's log is filtered by; `people` are the group itself, its members and invitations. */
export const logKinds = ['people', 'measurement', 'notebook', 'fit'] as const;
export type LogKind = (typeof logKinds)[number];

export const logQuerySchema = z.object({
  /** `next` of the page before. */
  before: z.string().max(200).optional(),
  /** Only what this person did. */
  person: idSchema.optional(),
  kind: z.enum(logKinds).optional(),
  limit: z.coerce.number<string>().int().min(1).max(200).default(50),
});
export type LogQuery = z.output<typeof logQuerySchema>;

const personSchema = z.object({ userId: idSchema, email: z.string() });

export const logEventSchema = z.object({
  id: idSchema,
  at: instantSchema,
  /** Null for what the program did by itself. */
  actor: personSchema.nullable(),
  /** As the policies name it: `notebook.edit`. */
  action: z.string(),
  subject: z.object({
    type: z.string(),
    id: idSchema.nullable(),
    /** What it is called now; null where it is gone or has no name. */
    name: z.string().nullable(),
    /** The notebook that a fit belongs to. */
    notebook: idSchema.nullable(),
  }),
  /** Names, roles and numbers of versions; never a measured or fitted value. */
  details: z.record(z.string(), z.union([z.string(), z.number(), z.boolean(), z.array(z.string())])),
});
export type LogEvent = z.infer<typeof logEventSchema>;

/** A page of a group's log, newest first. */
export const groupLogSchema = z.object({
  events: z.array(logEventSchema),
  /** Names the page after this one; null at the beginning of the log. */
  next: z.string().nullable(),
  /** Everybody who is in the log. */
  people: z.array(personSchema),
});
export type GroupLog = z.infer<typeof groupLogSchema>;
