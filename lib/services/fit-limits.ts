import { FitLimit, Group, User } from '@/models';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { log } from '@/lib/log';
import type { Actor } from './access';
import { recordEvent } from './audit';
import { everyGroup, readQueue } from './fit-queue';

/** Most fits of one group at once that can be asked for. */
export const mostGroupFits = 64;

export interface FitLimits {
  /** For every group without a limit of its own; null where nobody has set one and the configuration's holds. */
  everyGroup: number | null;
  configured: number;
  groups: { id: string; name: string; limit: number | null; running: number; waiting: number }[];
}

async function requireAdmin(actor: Actor): Promise<void> {
  database();
  const user = await User.findByPk(actor.userId, { attributes: ['siteAdmin'] });
  if (!user?.siteAdmin) throw new AppError('forbidden', 'Only a site administrator sets limits of fits.');
}

/** How many fits each group may run at once, with what runs and waits. For site administrators. */
export async function readFitLimits(actor: Actor): Promise<FitLimits> {
  await requireAdmin(actor);
  const [limits, groups, { waiting, loads }] = await Promise.all([
    FitLimit.findAll(),
    Group.findAll({ order: ['name', 'id'] }),
    readQueue(),
  ]);
  const set = new Map(limits.map(({ scope, fits }) => [scope, fits]));
  return {
    everyGroup: set.get(everyGroup) ?? null,
    configured: config().groupFits,
    groups: groups.map(({ id, name }) => ({
      id,
      name,
      limit: set.get(id) ?? null,
      running: loads.get(id)?.running ?? 0,
      waiting: waiting.filter(({ groupId }) => groupId === id).length,
    })),
  };
}

/**
 * Sets how many fits a group, or every group without a limit of its own (`groupId` null), may run at once; `fits` null takes
 * the limit back. It holds from the next fit that is taken up on; what runs is left alone.
 */
export async function setFitLimit(
  actor: Actor,
  { groupId, fits }: { groupId: string | null; fits: number | null },
): Promise<void> {
  await requireAdmin(actor);
  if (fits !== null && (!Number.isInteger(fits) || fits < 1 || fits > mostGroupFits)) {
    const message = `A limit is a whole number from 1 to ${mostGroupFits}.`;
    throw new AppError('invalid', message, [{ path: 'fits', message }]);
  }
  await database().transaction(async (transaction) => {
    if (groupId !== null && !(await Group.findByPk(groupId, { transaction }))) throw notFound('group');
    const scope = groupId ?? everyGroup;
    if (fits === null) await FitLimit.destroy({ where: { scope }, transaction });
    else await FitLimit.upsert({ scope, fits, setBy: actor.userId, setAt: new Date() }, { transaction });
    if (groupId === null) return;
    const subject = { subjectType: 'group', subjectId: groupId } as const;
    await recordEvent(
      { groupId, actorId: actor.userId, action: 'group.fit-limit', ...subject, details: { fits } },
      transaction,
    );
  });
  log.info({ groupId, fits, user: actor.userId }, 'a limit of fits was set');
}
