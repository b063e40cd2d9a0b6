import { randomUUID } from 'node:crypto';
import type { Transaction } from 'sequelize';
import { Group, Measurement, MeasurementVersion, type StoredFile } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import type { Finding, PreflightPassed, UploadedFile } from '@/lib/measurements';
import { presentCreated } from '@/lib/presenters/measurements';
import {
  fileParts,
  uploadMetaSchema,
  type ErrorDetail,
  type MeasurementCreated,
  type UploadMeta,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { writeDoubles } from './inference-spec';
import { writeTheory } from './stored-theory';
import {
  cleanFileName,
  discardFiles,
  nameFromFile,
  storeFiles,
  type FilePart,
  type UploadedPart,
} from './measurement-files';
import { checkFiles } from './measurement-preflight';

/** Every part that the form of an upload may have. */
export type UploadForm = Readonly<Partial<Record<FilePart | 'meta', UploadedPart>>>;

interface CheckedUpload {
  files: Partial<Record<FilePart, UploadedPart>> & { file: UploadedPart };
  meta: UploadMeta;
  result: PreflightPassed;
}

const refuse = (path: string, message: string): AppError =>
  new AppError('invalid', message, [{ path, message }]);

/** A form in a page sends a part without name and bytes for a file that nobody chose. */
const given = (part: UploadedPart | undefined): UploadedPart | undefined =>
  part && (part.fileName !== '' || part.bytes.byteLength > 0) ? part : undefined;

function readMeta(part: UploadedPart | undefined): UploadMeta {
  if (!part) return {};
  let value: unknown;
  try {
    value = JSON.parse(new TextDecoder().decode(part.bytes));
  } catch (error) {
    const reason = error instanceof Error ? error.message : 'unreadable';
    throw refuse('meta', `The part \`meta\` is not valid JSON (${reason}). Send an object, or leave it out.`);
  }
  const parsed = uploadMetaSchema.safeParse(value);
  if (parsed.success) return parsed.data;
  const details: ErrorDetail[] = parsed.error.issues.map(({ path, message }) => ({
    path: ['meta', ...path.map(String)].join('.'),
    message,
  }));
  throw new AppError(
    'invalid',
    `The part \`meta\` isn't valid. ${details[0].path}: ${details[0].message}`,
    details,
  );
}

const detailOf = ({ part, line, column, message, remedy }: Finding): ErrorDetail => ({
  path: part ?? 'file',
  ...(line === undefined ? {} : { line }),
  ...(column === undefined ? {} : { column }),
  message: remedy === undefined ? message : `${message} ${remedy}`,
});

/** Reads and checks an upload without storing anything; every fault is `invalid` with its place and remedy. */
async function checkUpload(form: UploadForm): Promise<CheckedUpload> {
  const file = given(form.file);
  if (!file) throw refuse('file', 'There is no file. Choose the measurement as the part `file`.');
  const meta = readMeta(given(form.meta));
  if (meta.blind === true) {
    throw refuse(
      'meta.blind',
      'Blind measurements are not supported in this version. Nothing was stored; leave out `blind` to upload it open.',
    );
  }
  const named = (part: FilePart): UploadedFile | undefined => {
    const upload = given(form[part]);
    return upload && { bytes: upload.bytes, name: upload.fileName };
  };
  const { files, result } = await checkFiles({
    file: { bytes: file.bytes, name: file.fileName },
    covariance: named('covariance'),
    mocks: named('mocks'),
    window: named('window'),
    columns: named('columns'),
    theoryCovariance: named('theoryCovariance'),
    mapping: meta.columns,
    spectrum: meta.spectrum,
    mockCount: meta.mockCount,
  });
  if (!result.ok) {
    const details = result.checks.filter(({ level }) => level === 'error').map(detailOf);
    const more = details.length > 1 ? ` And ${details.length - 1} more.` : '';
    const message = `The measurement can't be used, and nothing was stored. ${details[0].message}${more}`;
    throw new AppError('invalid', message, details);
  }
  // Those that came back from the check: it may have taken the bytes of the form with it.
  const part = ({ bytes, name }: UploadedFile): UploadedPart => ({ bytes, fileName: name });
  return {
    files: {
      file: part(files.file),
      ...Object.fromEntries(
        fileParts.flatMap((name) => {
          const checked = name === 'file' ? undefined : files[name];
          return checked ? [[name, part(checked)]] : [];
        }),
      ),
    },
    meta,
    result,
  };
}

/** The same bytes beside a blind measurement would let its values be read in the open. */
async function refuseTwinOfBlind(groupId: string, sha256: string, transaction: Transaction): Promise<void> {
  const twin = await MeasurementVersion.findOne({
    where: { sha256 },
    attributes: ['id'],
    include: [{ model: Measurement, where: { groupId, blind: true }, attributes: [], required: true }],
    transaction,
  });
  if (!twin) return;
  throw new AppError(
    'blind',
    'The same bytes are in this group as a blind measurement. A second, open one would undo its blindness.',
    [{ path: 'file', message: 'same bytes as a blind measurement' }],
  );
}

/** Rows of a version, all but its number and who belongs to it. */
function versionOf({ result, meta }: CheckedUpload, files: StoredFile[]) {
  const { measurement, summary } = result;
  const none = new Float64Array(summary.rows).fill(NaN);
  return {
    rows: summary.rows,
    kappaMin: summary.kappaMin,
    kappaMax: summary.kappaMax,
    hasBinEdges: summary.hasBinEdges,
    covarianceSource: result.covarianceSource,
    mockCount: result.mockCount,
    truth: meta.truth ?? null,
    spectrum: result.spectrum,
    sha256: files[0].sha256,
    files,
    mapping: { ...result.mapping },
    checks: result.checks.map((check) => ({ ...check })),
    points: writeDoubles(
      measurement.kappa,
      measurement.kappaLo ?? none,
      measurement.kappaHi ?? none,
      measurement.S,
    ),
    covariance: writeDoubles(result.covariance),
    theory: writeTheory(result.theory),
  };
}

/**
 * Objects first, then all rows in one transaction; where that fails the objects go too. The group's row is locked, so
 * that of two uploads at once the later sees what the earlier wrote.
 */
async function store(
  access: Access,
  upload: CheckedUpload,
  measurementId: string,
  settle: (transaction: Transaction, now: Date) => Promise<{ measurement: Measurement; version: number }>,
): Promise<MeasurementCreated> {
  const versionId = randomUUID();
  const files = await storeFiles({ measurementId, versionId }, upload.files);
  try {
    return await database().transaction(async (transaction) => {
      const { groupId } = access;
      await Group.findByPk(groupId, { attributes: ['id'], lock: true, transaction });
      await refuseTwinOfBlind(groupId, files[0].sha256, transaction);
      const now = new Date();
      const { measurement, version } = await settle(transaction, now);
      const row = await MeasurementVersion.create(
        {
          id: versionId,
          measurementId,
          version,
          ...versionOf(upload, files),
          createdBy: access.actor.userId,
          createdAt: now,
        },
        { transaction },
      );
      await recordEvent(
        {
          groupId,
          actorId: access.actor.userId,
          action: 'measurement.upload',
          subjectType: 'measurement',
          subjectId: measurementId,
          details: { version, rows: row.rows, sha256: row.sha256 },
        },
        transaction,
      );
      return presentCreated(measurement, row);
    });
  } catch (error) {
    await discardFiles(files);
    throw error;
  }
}

/** Only of simulated data is it known what was put in. */
function requireSimulated({ truth }: UploadMeta, simulated: boolean): void {
  if (truth === undefined || simulated) return;
  throw refuse(
    'meta.truth',
    'Only simulated data have values that were put in. Say `simulated: true`, or leave out `truth`.',
  );
}

/** Uploads a measurement into the group of `access`. Nothing is stored unless all of it is well. */
export async function uploadMeasurement(access: Access, form: UploadForm): Promise<MeasurementCreated> {
  access.require('measurement.upload');
  const upload = await checkUpload(form);
  const { meta, files } = upload;
  requireSimulated(meta, meta.simulated ?? false);
  const id = randomUUID();
  return store(access, upload, id, async (transaction, now) => {
    const measurement = await Measurement.create(
      {
        id,
        groupId: access.groupId,
        name: meta.name ?? nameFromFile(cleanFileName(files.file.fileName, 'file')),
        description: meta.description ?? '',
        blind: false,
        simulated: meta.simulated ?? false,
        createdBy: access.actor.userId,
        createdAt: now,
      },
      { transaction },
    );
    return { measurement, version: 1 };
  });
}

/**
 * Uploads a newer version of the measurement of `access`. Notebooks stay on the version that they were opened on. A
 * name or description given replaces the old one; whether it is simulated can't change.
 */
export async function uploadVersion(access: Access, form: UploadForm): Promise<MeasurementCreated> {
  access.require('measurement.upload');
  const upload = await checkUpload(form);
  const { meta } = upload;
  return store(access, upload, access.id, async (transaction) => {
    const measurement = await Measurement.findByPk(access.id, { lock: true, transaction });
    if (!measurement) throw notFound('measurement');
    if (meta.simulated !== undefined && meta.simulated !== measurement.simulated) {
      throw refuse(
        'meta.simulated',
        'A version can’t change whether the measurement is simulated. Upload it as a measurement of its own.',
      );
    }
    requireSimulated(meta, measurement.simulated);
    await measurement.update(
      { name: meta.name ?? measurement.name, description: meta.description ?? measurement.description },
      { transaction },
    );
    const latest = await MeasurementVersion.max<number, MeasurementVersion>('version', {
      where: { measurementId: access.id },
      transaction,
    });
    return { measurement, version: (latest ?? 0) + 1 };
  });
}
