import type { Actor } from '@/lib/auth/actor';
import { QueryTypes } from 'sequelize';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { idSchema, roleSchema, type Role } from '@/lib/schemas';
import { may, mayOrThrow, type Action } from '@/lib/policies';
import { SharedReads } from './shared-reads';

export type { Actor };

export type RecordKind = 'group' | 'measurement' | 'notebook' | 'fit' | 'scan' | 'check';

const proof = Symbol('authorised');

/**
 * A member's permission on one record of their group. Only `authorise` makes one, so that a service that asks for it
 * can't be reached around the policies; `require` then says which action it is asked for.
 */
export interface Access {
  readonly [proof]: true;
  readonly actor: Actor;
  readonly role: Role;
  readonly groupId: string;
  /** Id of the group, measurement, notebook, fit, scan or check that was authorised. */
  readonly id: string;
  readonly kind: RecordKind;
  /** Throws `forbidden` unless the role allows it too. */
  require(action: Action): void;
}

/** Where a record of each kind says which group it is of. */
const records: Readonly<Record<RecordKind, { table: string; group: string }>> = {
  group: { table: '`groups`', group: 'id' },
  measurement: { table: 'measurements', group: 'group_id' },
  notebook: { table: 'notebooks', group: 'group_id' },
  fit: { table: 'fits', group: 'group_id' },
  scan: { table: 'scans', group: 'group_id' },
  check: { table: 'checks', group: 'group_id' },
};

interface Member {
  groupId: string;
  userId: string;
  role: string;
}

/** Ids that aren't UUIDs name nothing. */
const wellFormed = (id: unknown): id is string => idSchema.safeParse(id).success;

/** Members of the group of a record who may sign in: all of them, or the one that is asked for. Nobody where there is no such record. */
async function membersOf(kind: RecordKind, id: string, userId: string | null): Promise<Member[]> {
  if (!wellFormed(id)) return [];
  const { table, group } = records[kind];
  return database().query<Member>(
    `SELECT m.group_id AS groupId, m.user_id AS userId, m.role
       FROM ${table} AS r
       JOIN memberships AS m ON m.group_id = r.${group}
       JOIN users AS u ON u.id = m.user_id AND u.disabled_at IS NULL
      WHERE r.id = :id ${userId === null ? '' : 'AND m.user_id = :userId'}`,
    { replacements: { id, userId }, type: QueryTypes.SELECT },
  );
}

/** One read tells of everybody who watches a record. */
const watched = new SharedReads<Member[]>();

/** Whether a failure says that the record isn't there for this person, now or any more. */
export const isShut = (error: unknown): boolean =>
  error instanceof AppError && (error.code === 'not_found' || error.code === 'forbidden');

/**
 * What `actor` may do on one record: `not_found` where they aren't of its group or may not read it, so that nobody
 * learns of what they may not see; `forbidden` where the role is too small for the action.
 */
export async function authorise(actor: Actor, kind: RecordKind, id: string, action: Action): Promise<Access> {
  const [member] = await membersOf(kind, id, actor.userId);
  return permit(actor, member, kind, id, action);
}

/**
 * The same for one of many who watch a record and are told of its changes together: the members of its group are read once for
 * all who ask at about the same time, after they asked, so that whoever was removed sees nothing of what comes after.
 */
export async function authoriseWatcher(
  actor: Actor,
  kind: RecordKind,
  id: string,
  action: Action,
): Promise<Access> {
  const members = await watched.read(`${kind} ${id}`, () => membersOf(kind, id, null));
  const member = members.find(({ userId }) => userId === actor.userId);
  return permit(actor, member, kind, id, action);
}

function permit(
  actor: Actor,
  member: Member | undefined,
  kind: RecordKind,
  id: string,
  action: Action,
): Access {
  if (!member) throw notFound(kind);
  const { groupId } = member;
  const role = roleSchema.parse(member.role);
  if (!may(role, `${kind}.read`)) throw notFound(kind);
  mayOrThrow(role, action);
  return {
    [proof]: true,
    actor,
    role,
    groupId,
    id,
    kind,
    require: (another) => mayOrThrow(role, another),
  };
}
