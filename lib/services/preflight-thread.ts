import { parentPort, workerData } from 'node:worker_threads';
import {
  preflight,
  type ColumnMapping,
  type PowerSpectrum,
  type PreflightResult,
  type UploadedFile,
} from '@/lib/measurements';
import { columnNameFault } from '@/lib/templates';
import { ownedBuffers } from './owned-buffers';

/** The files of an upload and what was said about them. */
export interface FilesToCheck {
  file: UploadedFile;
  covariance?: UploadedFile;
  mocks?: UploadedFile;
  window?: UploadedFile;
  columns?: UploadedFile;
  theoryCovariance?: UploadedFile;
  mapping?: ColumnMapping;
  spectrum?: PowerSpectrum;
  mockCount?: number;
}

/** The result, and the files back: their memory went along. */
export interface CheckedFiles {
  files: FilesToCheck;
  result: PreflightResult;
}

/** The entry of a thread that checks one upload and ends. It is bundled by itself and started by its path. */
const files = workerData as FilesToCheck;
const answer: CheckedFiles = { files, result: preflight({ ...files, columnFault: columnNameFault }) };
parentPort?.postMessage(answer, ownedBuffers(answer));
