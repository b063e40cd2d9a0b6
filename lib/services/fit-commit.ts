import { literal, type Transaction } from 'sequelize';
import { Fit, FitBlock, FitReplica } from '@/models';
import { database } from '@/lib/db';
import { endedStatuses, fitStatusSchema, type FitStatus } from '@/lib/schemas';
import { noteEnd } from './fit-mails';
import { writeDoubles } from './inference-spec';
import { strideOf } from './fit-schedule';
import type { StoredReport } from '@/lib/schemas/stored-report';

/** One replica's draws of one block, as they were made. */
export interface MadeBlock {
  replica: number;
  /** Number of the first draw, counted from the start of warm-up. */
  first: number;
  count: number;
  width: number;
  values: Float64Array;
}

/** What a block leaves behind in the store. */
export interface StoredBlock {
  replica: number;
  firstDraw: number;
  stride: number;
  rows: number;
  width: number;
  values: Float64Array;
}

/**
 * The rows of a block that are stored: all of warm-up; of kept draws those on the stride that holds at the block's end. Null
 * where the stride passes the block over. A block lies on one side of the end of warm-up.
 */
export function storedBlock(block: MadeBlock, warmup: number): StoredBlock | null {
  const { replica, first, count, width, values } = block;
  if (first < warmup) return { replica, firstDraw: first, stride: 1, rows: count, width, values };
  const stride = strideOf(first + count - warmup);
  const skipped = (stride - ((first - warmup) % stride)) % stride;
  if (skipped >= count) return null;
  const rows = Math.ceil((count - skipped) / stride);
  const kept = stride === 1 ? values : new Float64Array(rows * width);
  for (let row = 0; stride > 1 && row < rows; row++) {
    const offset = (skipped + row * stride) * width;
    kept.set(values.subarray(offset, offset + width), row * width);
  }
  return { replica, firstDraw: first + skipped, stride, rows, width, values: kept };
}

/** What the row of a fit says after a write. */
export interface Standing {
  draws: number;
  maxDraws: number;
  targetFrom: number;
  stopRequested: boolean;
}

interface Fenced {
  fitId: string;
  epoch: number;
}

/** The database's clock: the one that every reader of the row shares. */
const committedAt = literal('UTC_TIMESTAMP(3)');

/** The row, locked; null where another worker has taken the fit. */
async function lockOwn({ fitId, epoch }: Fenced, transaction: Transaction): Promise<Fit | null> {
  const fit = await Fit.findByPk(fitId, {
    attributes: [
      'id',
      'epoch',
      'draws',
      'maxDraws',
      'targetFrom',
      'stopRequested',
      'millisecondsSpent',
      'status',
      'startedBy',
      'stoppedBy',
    ],
    transaction,
    lock: transaction.LOCK.UPDATE,
  });
  return fit?.epoch === epoch ? fit : null;
}

const standingOf = ({ draws, maxDraws, targetFrom, stopRequested }: Fit): Standing => ({
  draws,
  maxDraws,
  targetFrom,
  stopRequested,
});

export interface DrawsCommit extends Fenced {
  /** Recorded draws a replica before and after. */
  from: number;
  to: number;
  warmup: number;
  blocks: StoredBlock[];
  states: { replica: number; state: Buffer }[];
  milliseconds: number;
  drawsPerSecond: number | null;
  report: StoredReport;
}

/**
 * Puts draws and the states that follow them into the database in one transaction. Null where another worker has taken
 * the fit; nothing is written then. Repeating a commit that had gone through (its answer was lost) writes nothing twice.
 */
export async function commitDraws(commit: DrawsCommit): Promise<Standing | null> {
  const { fitId, epoch, from, to } = commit;
  return database().transaction(async (transaction) => {
    const fit = await lockOwn(commit, transaction);
    if (!fit || endedStatuses.includes(fitStatusSchema.parse(fit.status))) return null;
    if (fit.draws === to) return standingOf(fit);
    if (fit.draws !== from) throw new Error(`Fit ${fitId} has ${fit.draws} draws where ${from} were due.`);
    for (const { values, ...block } of commit.blocks) {
      // One by one: only single inserts bind their values, and many at once would write every byte as two digits.
      await FitBlock.create({ fitId, ...block, values: writeDoubles(values) }, { transaction });
    }
    for (const { replica, state } of commit.states) {
      const [found] = await FitReplica.update(
        { draws: to, state },
        { where: { fitId, replica }, transaction },
      );
      if (found === 0) await FitReplica.create({ fitId, replica, draws: to, state }, { transaction });
    }
    const [written] = await Fit.update(
      {
        draws: to,
        status: to < commit.warmup ? 'warming-up' : 'sampling',
        millisecondsSpent: Number(fit.millisecondsSpent) + commit.milliseconds,
        drawsPerSecond: commit.drawsPerSecond,
        report: { ...commit.report },
        committedAt,
      },
      { where: { id: fitId, epoch }, transaction },
    );
    if (written !== 1) throw new Error(`Fit ${fitId} couldn't be written under its own lock.`);
    return { ...standingOf(fit), draws: to };
  });
}

export interface LookCommit extends Fenced {
  /** The draws that were looked at; all that are committed. */
  draws: number;
  report: StoredReport;
  /** How the fit ends by this look, or null where it goes on; asked with the row as it stands under lock. */
  judge(standing: Standing): FitStatus | null;
}

/** Writes what a look at the committed draws found, and the end of the fit where it brings that. Null as above. */
export async function commitLook(look: LookCommit): Promise<(Standing & { ended: FitStatus | null }) | null> {
  const { fitId, epoch, draws, report } = look;
  return database().transaction(async (transaction) => {
    const fit = await lockOwn(look, transaction);
    if (!fit) return null;
    const standing = standingOf(fit);
    const status = fitStatusSchema.parse(fit.status);
    // The answer to an earlier attempt was lost.
    if (endedStatuses.includes(status)) return { ...standing, ended: status };
    if (fit.draws !== draws)
      throw new Error(`Fit ${fitId} has ${fit.draws} draws where ${draws} were looked at.`);
    const ended = look.judge(standing);
    const ending = { status: ended ?? status, leaseUntil: null, stopRequested: false, endedAt: new Date() };
    await Fit.update(
      { report: { ...report }, committedAt, ...(ended === null ? {} : ending) },
      { where: { id: fitId, epoch }, transaction },
    );
    if (ended !== null) await noteEnd(fit, ended, transaction);
    return { ...standing, ended };
  });
}
