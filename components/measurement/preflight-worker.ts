import {
  MeasurementError,
  parseMatrix,
  parseMeasurement,
  preflight,
  recogniseColumns,
  type ColumnMapping,
  type NumericMatrix,
  type ParsedTable,
  type PowerSpectrum,
  type UploadedFile,
} from '@/lib/measurements';
import type { FilePart } from '@/lib/schemas';
import { columnNameFault } from '@/lib/templates/column-parameters';
import { viewOf, type PreflightView } from './preflight-view';

/** A file that the worker is to check; its bytes are sent once and remembered by `key`. */
export interface WorkerFile {
  key: string;
  part: FilePart;
  name: string;
  bytes: ArrayBuffer | null;
}

export interface PreflightRequest {
  id: number;
  files: WorkerFile[];
  /** Which column means what; null lets the names decide. */
  mapping: ColumnMapping | null;
  mockCount: number | null;
  /** By which a bispectrum becomes S; null where nothing was given. */
  spectrum: PowerSpectrum | null;
}

export type PreflightReply = { id: number; view: PreflightView } | { id: number; fault: string };

const bytesByKey = new Map<string, UploadedFile>();
const readByKey = new Map<string, ParsedTable | NumericMatrix>();

/** Reads a file once; one that can't be read is handed on as bytes, and the preflight says why. */
function readOnce<T extends ParsedTable | NumericMatrix>(
  key: string,
  step: (file: UploadedFile) => T,
): T | UploadedFile {
  const known = readByKey.get(key);
  if (known) return known as T;
  const file = bytesByKey.get(key.slice(key.indexOf(':') + 1)) as UploadedFile;
  try {
    const made = step(file);
    readByKey.set(key, made);
    return made;
  } catch (error) {
    if (error instanceof MeasurementError) return file;
    throw error;
  }
}

function matrix(file: WorkerFile | undefined): NumericMatrix | UploadedFile | null {
  if (!file || (file.part !== 'covariance' && file.part !== 'mocks')) return null;
  const { part, key } = file;
  return readOnce(`${part}:${key}`, ({ bytes, name }) => parseMatrix(bytes, name, { part }));
}

function run({ files, mapping, mockCount, spectrum }: PreflightRequest): PreflightView {
  const started = performance.now();
  for (const { key, name, bytes } of files) {
    if (bytes) bytesByKey.set(key, { bytes: new Uint8Array(bytes), name });
  }
  const byPart = (part: WorkerFile['part']) => files.find((file) => file.part === part);
  const upload = (part: WorkerFile['part']): UploadedFile | undefined => {
    const file = byPart(part);
    return file && bytesByKey.get(file.key);
  };
  const points = byPart('file');
  if (!points) throw new Error('The worker was asked to check no points.');
  const file = readOnce(`file:${points.key}`, ({ bytes, name }) => parseMeasurement(bytes, name));
  const result = preflight({
    file,
    covariance: matrix(byPart('covariance')),
    mocks: matrix(byPart('mocks')),
    window: upload('window'),
    columns: upload('columns'),
    theoryCovariance: upload('theoryCovariance'),
    columnFault: columnNameFault,
    mapping,
    mockCount,
    spectrum,
  });
  const shown = mapping ?? (result.table ? recogniseColumns(result.table).mapping : {});
  return viewOf(result, shown, performance.now() - started);
}

self.addEventListener('message', ({ data }: MessageEvent<PreflightRequest>) => {
  let reply: PreflightReply;
  try {
    reply = { id: data.id, view: run(data) };
  } catch (error) {
    reply = { id: data.id, fault: error instanceof Error ? error.message : String(error) };
  }
  self.postMessage(reply);
});
