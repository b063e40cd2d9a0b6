import { setTimeout as sleep } from 'node:timers/promises';
import type { Transaction } from 'sequelize';
import type { z } from 'zod';
import { Check } from '@/models';
import { database } from '@/lib/db';
import { notFound } from '@/lib/errors';
import { enqueueCheck, workerPlaces } from '@/lib/jobs';
import { log } from '@/lib/log';
import type { QueuePlace } from '@/lib/presenters/fits';
import { presentCheck } from '@/lib/presenters/checks';
import {
  checkRequestSchema,
  type NotebookCheck as CheckAnswer,
  type CheckListed,
  type startCheckSchema,
} from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';
import type { Access } from './access';
import { recordEvent } from './audit';
import { canonicalSha256 } from './canonical-json';
import { checkWarmup } from './check-model';
import { placeOf } from './fit-queue';
import { samplerOfNewFits } from './fit-sampler';
import { lockNotebook } from './fits';
import { inferenceSpec } from './inference-spec';
import { refuseArchived } from './notebook-archive';
import { checkFittable } from './notebook-settings';
import { emailsOf } from './people';
import { program } from './program';

type Settings = z.output<typeof startCheckSchema>;

/** Milliseconds between two looks of an answer that waits for its check. */
const pause = 200;

/** Seconds a data set and field where nothing was measured yet, on one thread. */
const usualSeconds = 0.05;

/** Seconds that `left` data sets will take: at the pace of the notebook's last check, or else as such checks do. */
async function expectedSeconds(notebookId: string, fields: number, left: number): Promise<number> {
  const before = await Check.findAll({
    where: { notebookId },
    attributes: ['done', 'millisecondsSpent'],
    order: [['number', 'DESC']],
    limit: 5,
  });
  const last = before.find(({ done }) => done > 0);
  const each = last ? Number(last.millisecondsSpent) / last.done / 1000 : usualSeconds * (1 + fields);
  return each * left;
}

const waits = ({ status }: Check): boolean => status === 'queued' || status === 'running';

/** Freezes what is to be checked; the row that asked for the same before, if there is one, answers or goes on. */
async function request(access: Access, body: Settings): Promise<Check> {
  return database().transaction(async (transaction) => {
    const { notebook, revision, version, measured } = await lockNotebook(access, transaction);
    refuseArchived(notebook);
    const { settings } = revision;
    checkFittable(inferenceSpec(measured.numbers, settings).spec);
    const frozen = checkRequestSchema.parse({
      ...settings,
      ...body,
      inputs: measured.parts.flatMap((part) => part.version.files.map(({ sha256 }) => sha256)),
      measurementVersion: version.version,
      mockCount: version.mockCount,
      warmup: checkWarmup,
      sampler: samplerOfNewFits.version,
      program: program.program,
    });
    const requestSha256 = canonicalSha256(frozen);
    const known = await Check.findOne({ where: { notebookId: notebook.id, requestSha256 }, transaction });
    if (known && waits(known) && known.stopRequested) {
      return known.update({ stopRequested: false, stoppedBy: null }, { transaction });
    }
    if (known && (waits(known) || known.status === 'done')) return known;
    const left = frozen.datasets - (known?.done ?? 0);
    const fields = fieldCount(settings.template.options.fields);
    const queued = {
      status: 'queued',
      queuedAt: new Date(),
      expectedSeconds: await expectedSeconds(notebook.id, fields, left),
    };
    const made = known
      ? await known.update(
          { ...queued, message: null, stoppedBy: null, epoch: known.epoch + 1, endedAt: null },
          { transaction },
        )
      : await Check.create(
          {
            ...queued,
            notebookId: notebook.id,
            groupId: notebook.groupId,
            number: await nextNumber(notebook.id, transaction),
            kind: frozen.kind,
            revision: notebook.revision,
            measurementVersionId: version.id,
            request: frozen,
            requestSha256,
            startedBy: access.actor.userId,
            createdAt: new Date(),
          },
          { transaction },
        );
    await recordEvent(
      {
        groupId: notebook.groupId,
        actorId: access.actor.userId,
        action: 'check.start',
        subjectType: 'notebook',
        subjectId: notebook.id,
        details: { number: made.number, datasets: frozen.datasets },
      },
      transaction,
    );
    return made;
  });
}

const nextNumber = async (notebookId: string, transaction: Transaction): Promise<number> =>
  ((await Check.max<number | null, Check>('number', { where: { notebookId }, transaction })) ?? 0) + 1;

/**
 * Checks the posterior of a notebook as it stands, and waits for the result as many seconds as asked. The same request again
 * gives the stored result; one that was stopped or failed goes on from what is stored.
 */
export async function startCheck(access: Access, body: Settings, wait: number): Promise<CheckAnswer> {
  access.require('check.start');
  const check = await request(access, body);
  if (check.status === 'queued') {
    await enqueueCheck(check.id, check.epoch).catch((error: unknown) =>
      log.warn({ checkId: check.id, err: error }, 'a check is left to the workers’ own search'),
    );
  }
  const until = performance.now() + wait * 1000;
  while (performance.now() < until) {
    const row = await Check.findByPk(check.id, { attributes: ['status'] });
    if (!row || !waits(row)) break;
    await sleep(pause);
  }
  return present(check.id);
}

/** Whether an answer to `startCheck` is the result. */
export const hasEnded = ({ status }: Pick<CheckAnswer, 'status'>): boolean =>
  status !== 'queued' && status !== 'running';

/** Where a check stands in the queue; null where it runs or has ended. */
async function queueOf(check: Check): Promise<QueuePlace | null> {
  const held = check.leaseUntil !== null && check.leaseUntil.getTime() > Date.now();
  if (held || !waits(check)) return null;
  const [standing, places] = await Promise.all([placeOf(check.id), workerPlaces().catch(() => null)]);
  if (!standing) return null;
  const { place, group, running } = standing;
  return { place, groupRunning: group.running, groupLimit: group.limit, running, places };
}

async function present(id: string): Promise<CheckAnswer> {
  const check = await Check.findByPk(id);
  if (!check) throw notFound('check');
  const [people, queue] = await Promise.all([emailsOf([check.startedBy]), queueOf(check)]);
  return presentCheck(check, { startedBy: people.get(check.startedBy) ?? 'a former member', queue });
}

/** The check of `access` as its members see it. */
export async function readCheck(access: Access): Promise<CheckAnswer> {
  access.require('check.read');
  return present(access.id);
}

/** The checks of the notebook of `access`, first to last. */
export async function listChecks(access: Access): Promise<CheckListed[]> {
  access.require('notebook.read');
  const checks = await Check.findAll({ where: { notebookId: access.id }, order: [['number', 'ASC']] });
  if (checks.length === 0) return [];
  const people = await emailsOf(checks.map(({ startedBy }) => startedBy));
  return Promise.all(
    checks.map(async (check) =>
      presentCheck(check, {
        startedBy: people.get(check.startedBy) ?? 'a former member',
        queue: await queueOf(check),
      }),
    ),
  );
}

/**
 * Stops the check of `access`: at once where nobody holds it, else at the end of the blocks under way. What is done stays,
 * and asking for the same check again goes on from there. Stopping what has ended changes nothing.
 */
export async function stopCheck(access: Access): Promise<CheckAnswer> {
  access.require('check.stop');
  await database().transaction(async (transaction) => {
    const check = await Check.findByPk(access.id, { lock: true, transaction });
    if (!check) throw notFound('check');
    if (!waits(check) || check.stopRequested) return;
    const held = check.leaseUntil !== null && check.leaseUntil.getTime() > Date.now();
    const stoppedBy = access.actor.userId;
    await check.update(
      held
        ? { stopRequested: true, stoppedBy }
        : { status: 'stopped', stoppedBy, epoch: check.epoch + 1, leaseUntil: null, endedAt: new Date() },
      { transaction },
    );
    await recordEvent(
      {
        groupId: check.groupId,
        actorId: stoppedBy,
        action: 'check.stop',
        subjectType: 'notebook',
        subjectId: check.notebookId,
        details: { number: check.number, done: check.done },
      },
      transaction,
    );
  });
  return present(access.id);
}
