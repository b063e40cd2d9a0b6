import type { Actor } from '@/lib/auth/actor';
import { Fit, Group, Measurement, Membership, Notebook, Scan } from '@/models';
import { database } from '@/lib/db';
import { notFound } from '@/lib/errors';
import { idSchema, roleSchema, type Role } from '@/lib/schemas';
import { may, mayOrThrow, type Action } from '@/lib/policies';

export type { Actor };

export type RecordKind = 'group' | 'measurement' | 'notebook' | 'fit' | 'scan';

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
  /** Id of the group, measurement, notebook, fit or scan that was authorised. */
  readonly id: string;
  readonly kind: RecordKind;
  /** Throws `forbidden` unless the role allows it too. */
  require(action: Action): void;
}

async function groupOf(kind: RecordKind, id: string): Promise<string | null> {
  const attributes = ['groupId'];
  switch (kind) {
    case 'group':
      return (await Group.findByPk(id, { attributes: ['id'] }))?.id ?? null;
    case 'measurement':
      return (await Measurement.findByPk(id, { attributes }))?.groupId ?? null;
    case 'notebook':
      return (await Notebook.findByPk(id, { attributes }))?.groupId ?? null;
    case 'fit':
      return (await Fit.findByPk(id, { attributes }))?.groupId ?? null;
    case 'scan':
      return (await Scan.findByPk(id, { attributes }))?.groupId ?? null;
  }
}

/** Ids that aren't UUIDs name nothing. */
const wellFormed = (id: unknown): id is string => idSchema.safeParse(id).success;

/**
 * What `actor` may do on one record: `not_found` where they aren't of its group or may not read it, so that nobody
 * learns of what they may not see; `forbidden` where the role is too small for the action.
 */
export async function authorise(actor: Actor, kind: RecordKind, id: string, action: Action): Promise<Access> {
  database();
  const groupId = wellFormed(id) ? await groupOf(kind, id) : null;
  const membership =
    groupId === null ? null : await Membership.findOne({ where: { groupId, userId: actor.userId } });
  if (groupId === null || membership === null) throw notFound(kind);
  const role = roleSchema.parse(membership.role);
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
