import { z } from 'zod';
import { checkStatusSchema } from './checks';
import { fitStatusSchema } from './notebooks';
import { idSchema, instantSchema, roleSchema } from './shared';

export const serviceNames = ['database', 'queue', 'storage', 'mail'] as const;
export type ServiceName = (typeof serviceNames)[number];

const serviceSchema = z.object({
  name: z.enum(serviceNames),
  state: z.enum(['ok', 'away']),
  /** How long it took to answer; null where it didn't in time. */
  milliseconds: z.number().nullable(),
});
export type ServiceState = z.infer<typeof serviceSchema>;

/** A fit that has not ended, by where it belongs and never by what it is about. */
const queuedFitSchema = z.object({
  fitId: idSchema,
  groupId: idSchema,
  groupName: z.string(),
  notebookId: idSchema,
  number: z.number().int(),
  status: fitStatusSchema,
  /** A worker holds it now. */
  held: z.boolean(),
  since: instantSchema,
});
export type QueuedFit = z.infer<typeof queuedFitSchema>;

const queuedCheckSchema = queuedFitSchema
  .omit({ fitId: true })
  .extend({ checkId: idSchema, status: checkStatusSchema });

const workerSchema = z.object({
  id: z.string(),
  /** Where it runs and with what; null where it beats but hasn't told. */
  host: z.string().nullable(),
  pid: z.number().int().nullable(),
  threads: z.number().int().nullable(),
  fits: z.number().int().nullable(),
  version: z.string().nullable(),
  startedAt: instantSchema.nullable(),
  /** Seconds since its last sign of life. */
  silentFor: z.number(),
});
export type WorkerState = z.infer<typeof workerSchema>;

/** What changes by the second: services, queue, workers. */
export const instanceStateSchema = z.object({
  at: instantSchema,
  services: z.array(serviceSchema),
  queue: z.object({
    waiting: z.number().int(),
    running: z.number().int(),
    /** At most 200, running ones first, then in the order in which they came. */
    fits: z.array(queuedFitSchema),
    /** The same of checks, which take turns with fits. */
    checks: z.array(queuedCheckSchema),
  }),
  /** Null while the queue is away: nobody knows. */
  workers: z.array(workerSchema).nullable(),
});
export type InstanceState = z.infer<typeof instanceStateSchema>;

/** How much is stored. Rows of tables are the database's estimate. */
export const storageStateSchema = z.object({
  at: instantSchema,
  tables: z.array(z.object({ name: z.string(), rows: z.number(), bytes: z.number() })),
  tableBytes: z.number(),
  /** Null where the store doesn't answer. */
  objects: z.object({ count: z.number(), bytes: z.number() }).nullable(),
});
export type StorageState = z.infer<typeof storageStateSchema>;

export const usersQuerySchema = z.object({
  /** Part of the address. */
  search: z.string().trim().max(254).default(''),
  /** `next` of the page before. */
  after: z.string().max(254).optional(),
  limit: z.coerce.number<string>().int().min(1).max(200).default(50),
});
export type UsersQuery = z.output<typeof usersQuerySchema>;

export const siteUserSchema = z.object({
  userId: idSchema,
  email: z.string(),
  siteAdmin: z.boolean(),
  lastSignInAt: instantSchema.nullable(),
  /** Since when they may not sign in; null where they may. */
  disabledAt: instantSchema.nullable(),
  /** Open sessions, and personal tokens that aren't revoked. */
  sessions: z.number().int(),
  tokens: z.number().int(),
  groups: z.array(z.object({ id: idSchema, name: z.string(), role: roleSchema })),
});
export type SiteUser = z.infer<typeof siteUserSchema>;

export const siteUsersSchema = z.object({
  users: z.array(siteUserSchema),
  /** How many there are that the search finds. */
  count: z.number().int(),
  next: z.string().nullable(),
});
export type SiteUsers = z.infer<typeof siteUsersSchema>;

export const changeUserSchema = z.strictObject({ disabled: z.boolean() });

/** How many fits a group may run at once: its own limit, else what holds for every group, else the configuration. */
export const fitLimitsSchema = z.object({
  everyGroup: z.number().int().nullable(),
  configured: z.number().int(),
  groups: z.array(
    z.object({
      id: idSchema,
      name: z.string(),
      limit: z.number().int().nullable(),
      running: z.number().int(),
      waiting: z.number().int(),
    }),
  ),
});
export type FitLimits = z.infer<typeof fitLimitsSchema>;

export const setFitLimitSchema = z.strictObject({
  /** Null for every group without a limit of its own. */
  groupId: idSchema.nullable(),
  /** Null takes the limit back. */
  fits: z.number().nullable(),
});
