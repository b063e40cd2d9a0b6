import type { Transaction } from 'sequelize';
import { AuditEvent } from '@/models';

export interface AuditEntry {
  groupId: string;
  /** Null for what the program did by itself. */
  actorId: string | null;
  /** As the policies name it, e.g. `group.invite`. */
  action: string;
  subjectType: 'group' | 'invitation' | 'membership' | 'measurement' | 'notebook' | 'fit';
  subjectId: string | null;
  /** Names, roles, numbers of revisions; never a measured or fitted value. */
  details?: Record<string, unknown>;
}

/** Writes one line of a group's log, within the transaction of what it tells of. */
export async function recordEvent(entry: AuditEntry, transaction?: Transaction): Promise<void> {
  const { details = null, ...rest } = entry;
  await AuditEvent.create({ ...rest, details, createdAt: new Date() }, { transaction });
}
