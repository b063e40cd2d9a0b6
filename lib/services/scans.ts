import { setTimeout as sleep } from 'node:timers/promises';
import { Scan } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { scanRange } from '@/lib/inference/scan/scan-range';
import { enqueueScan } from '@/lib/jobs';
import { log } from '@/lib/log';
import { presentScan } from '@/lib/presenters/scans';
import {
  defaultNulls,
  scanRequestSchema,
  type Scan as ScanAnswer,
  type ScanRequest,
  type StartScan,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { canonicalSha256 } from './canonical-json';
import { refusingFaults } from './inference-faults';
import { refuseArchived } from './notebook-archive';
import { lockNotebook } from './fits';
import { emailsOf } from './people';
import { program } from './program';
import { checkScannable, scanSpecs, type ScanSpecs } from './scan-model';
import { isBlindVersion } from './version-lines';

/** How long an answer waits for its scan. */
const patience = 60_000;
const pause = 200;

/** The range that was asked for, or else the one that the mass priors reach over, within where the template is defined. */
function rangeOf(
  specs: ScanSpecs,
  priors: ScanRequest['priors'],
  body: StartScan,
): { muMin: number; muMax: number } {
  const range = scanRange(
    (specs.two ?? specs.one).template.parameters.filter(({ role }) => role === 'mass'),
    priors,
  );
  if (!range) {
    const message = 'The template has no frequency to scan for: choose one with a field.';
    throw new AppError('invalid', message, [{ path: 'template', message }]);
  }
  if ((specs.two ?? specs.one).template.blocks.some(({ kind }) => kind === 'light')) {
    const message = 'A light field has no frequency to scan for: choose a template of heavy fields.';
    throw new AppError('invalid', message, [{ path: 'template.options.fields', message }]);
  }
  const { least, most } = range;
  const { muMin = range.lo, muMax = range.hi } = body;
  const refuse = (path: string, message: string): never => {
    throw new AppError('invalid', message, [{ path, message }]);
  };
  if (!Number.isFinite(muMin) || !Number.isFinite(muMax)) {
    refuse('muMin', 'The mass is fixed: say from where to where to scan (muMin, muMax).');
  }
  if (muMin < least || muMax > most) {
    refuse(
      muMin < least ? 'muMin' : 'muMax',
      `The template is defined from ${least} to ${most}: keep the range within.`,
    );
  }
  if (!(muMin < muMax))
    refuse('muMin', `The range from ${muMin} to ${muMax} is empty: muMin must be below muMax.`);
  return { muMin, muMax };
}

/** Freezes what is to be scanned; the row that asked for the same before, if there is one, answers again. */
async function request(access: Access, body: StartScan): Promise<Scan> {
  return database().transaction(async (transaction) => {
    const { notebook, revision, version, measured } = await lockNotebook(access, transaction);
    refuseArchived(notebook);
    if (measured.blind) {
      throw new AppError(
        'plan_missing',
        'The measurement is blind: freeze a plan before anything is looked for in it.',
      );
    }
    const { settings } = revision;
    const parsed = scanRequestSchema.omit({ muMin: true, muMax: true }).parse({
      inputs: measured.parts.flatMap((part) => part.version.files.map(({ sha256 }) => sha256)),
      measurementVersion: version.version,
      ...settings,
      mockCount: version.mockCount,
      nulls: body.nulls ?? defaultNulls,
      program: program.program,
    });
    const specs = refusingFaults(() => {
      const found = scanSpecs(measured.numbers, parsed);
      checkScannable(found);
      return found;
    });
    const frozen: ScanRequest = { ...parsed, ...rangeOf(specs, parsed.priors, body) };
    const requestSha256 = canonicalSha256(frozen);
    const known = await Scan.findOne({ where: { notebookId: notebook.id, requestSha256 }, transaction });
    if (known && known.status !== 'failed') return known;
    if (known) {
      return known.update(
        { status: 'queued', message: null, epoch: known.epoch + 1, endedAt: null },
        { transaction },
      );
    }
    const last = await Scan.max<number | null, Scan>('number', {
      where: { notebookId: notebook.id },
      transaction,
    });
    const made = await Scan.create(
      {
        notebookId: notebook.id,
        groupId: notebook.groupId,
        number: (last ?? 0) + 1,
        measurementVersionId: version.id,
        request: frozen,
        requestSha256,
        status: 'queued',
        startedBy: access.actor.userId,
        createdAt: new Date(),
      },
      { transaction },
    );
    await recordEvent(
      {
        groupId: notebook.groupId,
        actorId: access.actor.userId,
        action: 'scan.start',
        subjectType: 'notebook',
        subjectId: notebook.id,
        details: { number: made.number, muMin: frozen.muMin, muMax: frozen.muMax },
      },
      transaction,
    );
    return made;
  });
}

/**
 * Scans the measurement of a notebook as it stands, and waits for the result up to a minute. Asking for the same again gives
 * the stored result; nothing is computed or logged twice.
 */
export async function startScan(access: Access, body: StartScan): Promise<ScanAnswer> {
  access.require('scan.start');
  const scan = await request(access, body);
  if (scan.status === 'queued') {
    await enqueueScan(scan.id, scan.epoch).catch((error: unknown) =>
      log.warn({ scanId: scan.id, err: error }, 'a scan is left to the workers’ own search'),
    );
  }
  const until = performance.now() + patience;
  for (;;) {
    const row = await Scan.findByPk(scan.id, { attributes: ['status'] });
    if (!row || row.status === 'done' || row.status === 'failed' || performance.now() > until) break;
    await sleep(pause);
  }
  return present(scan.id);
}

/** Whether an answer to `startScan` is the result. */
export const hasEnded = ({ status }: Pick<ScanAnswer, 'status'>): boolean =>
  status === 'done' || status === 'failed';

async function present(id: string): Promise<ScanAnswer> {
  const scan = await Scan.findByPk(id, { attributes: { exclude: ['heights', 'planeHeights'] } });
  if (!scan) throw notFound('scan');
  const people = await emailsOf([scan.startedBy]);
  return presentScan(scan, {
    startedBy: people.get(scan.startedBy) ?? 'a former member',
    blind: await isBlindVersion(scan.measurementVersionId),
  });
}

/** The scan of `access` as its members see it. */
export async function readScan(access: Access): Promise<ScanAnswer> {
  access.require('scan.read');
  return present(access.id);
}
