import { QueryTypes, Transaction } from 'sequelize';
import { FitLimit } from '@/models';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { checkUnfinished, takeCheckLease } from './check-lease';
import { isUnfinished, takeLease } from './fit-lease';
import { clockAt, isHeld, leaseIsOver } from './lease-sql';
import { nextFit, turnOrder, type GroupLoad, type Loads, type WaitingFit } from './fit-turns';

/** Usage is told from fits that were sampled within so many hours; what is older weighs under two per cent. */
const hoursLooked = 6;

/** The scope of the limit that holds for every group without one of its own. */
export const everyGroup = 'site';

export interface QueueState {
  waiting: WaitingFit[];
  loads: Loads;
  /** Fits and checks that workers hold, of all groups. */
  running: number;
  now: number;
}

/** Everything that decides whose turn it is. `now` in place of the database's clock is for tests. */
export async function readQueue(now?: Date, transaction?: Transaction): Promise<QueueState> {
  const at = clockAt(now);
  const select = <T extends object>(sql: string, values: Record<string, unknown> = {}) =>
    database().query<T>(sql, { replacements: values, type: QueryTypes.SELECT, transaction });
  const waiting = await select<{
    kind: 'fit' | 'check';
    id: string;
    groupId: string;
    status: string;
    queuedAt: Date;
    expectedSeconds: number;
  }>(
    `SELECT 'fit' AS kind, id, group_id AS groupId, status, COALESCE(queued_at, created_at) AS queuedAt,
       expected_seconds AS expectedSeconds
     FROM fits WHERE ${isUnfinished} AND ${leaseIsOver(at)}
     UNION ALL
     SELECT 'check', id, group_id, status, queued_at, expected_seconds
     FROM checks WHERE ${checkUnfinished} AND ${leaseIsOver(at)}`,
  );
  const running = await select<{ groupId: string; running: number }>(
    `SELECT groupId, COUNT(*) AS running FROM (
       SELECT group_id AS groupId FROM fits WHERE ${isUnfinished} AND ${isHeld(at)}
       UNION ALL SELECT group_id FROM checks WHERE ${checkUnfinished} AND ${isHeld(at)}
     ) held GROUP BY groupId`,
  );
  const used = await select<{ groupId: string; seconds: number; servedAt: Date | null }>(
    `SELECT groupId,
       SUM(milliseconds_spent / 1000 * POW(0.5, TIMESTAMPDIFF(SECOND, COALESCE(ended_at, ${at}), ${at}) / 3600)) AS seconds,
       MAX(ended_at) AS servedAt
     FROM (
       SELECT group_id AS groupId, milliseconds_spent, ended_at FROM fits
       UNION ALL SELECT group_id, milliseconds_spent, ended_at FROM checks
     ) used WHERE milliseconds_spent > 0
       AND (ended_at IS NULL OR ended_at > TIMESTAMPADD(HOUR, -${hoursLooked}, ${at})) GROUP BY groupId`,
  );
  const clock = now ?? (await select<{ now: Date }>(`SELECT ${at} AS now`))[0].now;
  const limits = new Map((await FitLimit.findAll({ transaction })).map(({ scope, fits }) => [scope, fits]));
  const standard = limits.get(everyGroup) ?? config().groupFits;
  const loads = new Map<string, GroupLoad>();
  const groups = new Set([...waiting, ...running, ...used].map(({ groupId }) => groupId));
  for (const groupId of groups) {
    const { seconds = 0, servedAt = null } = used.find((each) => each.groupId === groupId) ?? {};
    loads.set(groupId, {
      running: Number(running.find((each) => each.groupId === groupId)?.running ?? 0),
      limit: limits.get(groupId) ?? standard,
      recentSeconds: Number(seconds),
      servedAt: servedAt && new Date(servedAt).getTime(),
    });
  }
  return {
    waiting: waiting.map(({ kind, id, groupId, status, queuedAt, expectedSeconds }) => ({
      kind,
      id,
      groupId,
      begun: status !== 'queued',
      queuedAt: new Date(queuedAt).getTime(),
      expectedSeconds,
    })),
    loads,
    running: running.reduce((sum, each) => sum + Number(each.running), 0),
    now: new Date(clock).getTime(),
  };
}

export type Taken =
  { kind: 'fit'; fitId: string; epoch: number } | { kind: 'check'; checkId: string; epoch: number };

/**
 * Takes the fit or check whose turn it is, with epoch + 1 and a lease; null where none may be taken. Claims of one group go one by one,
 * so that its limit holds whoever asks; one that is locked by another worker is passed over and asked for again later.
 */
export async function takeNext(leaseMs: number, now?: Date): Promise<Taken | null> {
  // Each statement is to see what others have committed, the counts above all.
  const isolationLevel = Transaction.ISOLATION_LEVELS.READ_COMMITTED;
  return database().transaction({ isolationLevel }, async (transaction) => {
    const locked = new Set<string>();
    let queue = await readQueue(now, transaction);
    let waiting = queue.waiting;
    for (;;) {
      const next = nextFit(waiting, queue.loads, queue.now);
      if (!next) return null;
      if (!locked.has(next.groupId)) {
        if (await lockRow('`groups`', next.groupId, transaction)) {
          locked.add(next.groupId);
          const passedOver = new Set(
            queue.waiting.filter((fit) => !waiting.includes(fit)).map(({ id }) => id),
          );
          queue = await readQueue(now, transaction);
          waiting = queue.waiting.filter(({ id }) => !passedOver.has(id));
        } else {
          waiting = waiting.filter(({ groupId }) => groupId !== next.groupId);
        }
        continue;
      }
      const { kind, id } = next;
      if (kind === 'fit' && (await lockRow('fits', id, transaction))) {
        const epoch = await takeLease(id, leaseMs, now, transaction);
        if (epoch !== null) return { kind, fitId: id, epoch };
      }
      if (kind === 'check' && (await lockRow('checks', id, transaction))) {
        const epoch = await takeCheckLease(id, leaseMs, now, transaction);
        if (epoch !== null) return { kind, checkId: id, epoch };
      }
      waiting = waiting.filter(({ id }) => id !== next.id);
    }
  });
}

/** Locks a row unless another holds it. */
async function lockRow(
  table: '`groups`' | 'fits' | 'checks',
  id: string,
  transaction: Transaction,
): Promise<boolean> {
  const rows = await database().query(`SELECT id FROM ${table} WHERE id = :id FOR UPDATE SKIP LOCKED`, {
    replacements: { id },
    type: QueryTypes.SELECT,
    transaction,
  });
  return rows.length > 0;
}

/** Where a waiting fit stands. */
export interface Standing {
  /** Counted from 1. */
  place: number;
  group: GroupLoad;
  running: number;
}

/** Where a fit stands in the queue; null where it doesn't wait. */
export async function placeOf(fitId: string): Promise<Standing | null> {
  const { waiting, loads, running, now } = await readQueue();
  const order = turnOrder(waiting, loads, now);
  const index = order.findIndex(({ id }) => id === fitId);
  const group = index < 0 ? undefined : loads.get(order[index].groupId);
  return group ? { place: index + 1, group, running } : null;
}
