import { existsSync } from 'node:fs';
import path from 'node:path';
import { Worker } from 'node:worker_threads';
import { AppError } from '@/lib/errors';
import { log } from '@/lib/log';
import { preflight, type PreflightResult } from '@/lib/measurements';
import { fileParts } from '@/lib/schemas';
import { columnNameFault } from '@/lib/templates';
import { ownedBuffers } from './owned-buffers';
import type { CheckedFiles, FilesToCheck } from './preflight-thread';

export type { FilesToCheck } from './preflight-thread';

/**
 * Up to this many bytes the check takes a tenth of a second, about as long as a thread to start, and is done where it is
 * asked for. It is less than the mocks or the covariance of the most bins, whose eigenvalues alone take longer.
 */
const IN_LINE_BYTES = 400_000;

export interface PreflightLimits {
  /** The largest uploads that are taken need a few seconds of an idle processor. */
  milliseconds: number;
  /** Heap of the thread. The numbers themselves lie outside it; what they can be is bounded by the size of a part. */
  heapMegabytes: number;
}

const standardLimits: PreflightLimits = { milliseconds: 60_000, heapMegabytes: 512 };

/** Each thread may hold ten times the size of its upload; further uploads wait for one, and those beyond come back later. */
const THREADS = 2;
const WAITING = 8;

let running = 0;
const queue: (() => void)[] = [];

async function inTurn<T>(act: () => Promise<T>): Promise<T> {
  if (running < THREADS) running += 1;
  else if (queue.length < WAITING) await new Promise<void>((resolve) => queue.push(resolve));
  else {
    const message = 'Many uploads are being checked just now. Nothing was stored; try again in a minute.';
    throw new AppError('unavailable', message);
  }
  try {
    return await act();
  } finally {
    const next = queue.shift();
    if (next) next();
    else running -= 1;
  }
}

const checkHere = (files: FilesToCheck): PreflightResult =>
  preflight({ ...files, columnFault: columnNameFault });

/** Which part an upload owes its size to. */
function largestPart(files: FilesToCheck): { part: string; bytes: number } {
  const sizes = fileParts.map((part) => ({ part, bytes: files[part]?.bytes.byteLength ?? 0 }));
  return sizes.reduce((a, b) => (b.bytes > a.bytes ? b : a));
}

function tooSlow({ milliseconds }: PreflightLimits): AppError {
  const seconds = Math.round(milliseconds / 1000);
  const message =
    `Checking the upload took longer than ${seconds} s and was stopped. Nothing was stored. ` +
    'Try again shortly, or hand in fewer mocks or write fewer digits.';
  return new AppError('unavailable', message);
}

function tooMuch(part: string, cause: Error): AppError {
  const message =
    'Checking the upload needs more memory than there is for it. Nothing was stored. Hand in fewer rows.';
  return new AppError('invalid', message, [{ path: part, message: 'too many rows to be checked' }], {
    cause,
  });
}

const ranOutOfMemory = (error: Error): boolean =>
  (error as NodeJS.ErrnoException).code === 'ERR_WORKER_OUT_OF_MEMORY';

async function checkInThread(
  bundle: string,
  files: FilesToCheck,
  limits: PreflightLimits,
): Promise<CheckedFiles> {
  // Asked before the memory goes to the thread, which takes it along when it fails.
  const { part } = largestPart(files);
  const thread = new Worker(/* turbopackIgnore: true */ bundle, {
    workerData: files,
    transferList: ownedBuffers(files),
    resourceLimits: { maxOldGenerationSizeMb: limits.heapMegabytes },
    execArgv: [],
  });
  let timer: NodeJS.Timeout | undefined;
  try {
    return await new Promise<CheckedFiles>((resolve, reject) => {
      timer = setTimeout(() => reject(tooSlow(limits)), limits.milliseconds);
      thread.once('message', resolve);
      thread.once('messageerror', reject);
      thread.once('error', (error: Error) => reject(ranOutOfMemory(error) ? tooMuch(part, error) : error));
      thread.once('exit', (code) => reject(new Error(`The thread of a preflight ended with code ${code}.`)));
    });
  } finally {
    clearTimeout(timer);
    await thread.terminate();
  }
}

/**
 * Checks the files of an upload, large ones in a thread of their own, so that nobody else waits for it. Large files are
 * given away: only those that come back can be read afterwards. `unavailable` where it takes too long or too many are
 * being checked, `invalid` where the memory doesn't suffice.
 */
export async function checkFiles(
  files: FilesToCheck,
  limits: PreflightLimits = standardLimits,
): Promise<CheckedFiles> {
  const bytes = fileParts.reduce((sum, part) => sum + (files[part]?.bytes.byteLength ?? 0), 0);
  if (bytes <= IN_LINE_BYTES) return { files, result: checkHere(files) };
  // By path and at run time: a bundler that followed it would make the thread a part of the pages.
  const bundle = path.join(
    /* turbopackIgnore: true */ process.cwd(),
    'dist',
    'worker',
    'preflight-thread.mjs',
  );
  if (!existsSync(bundle)) {
    log.warn({ bundle }, 'a large upload is checked in line: the thread is not built');
    return { files, result: checkHere(files) };
  }
  return inTurn(() => checkInThread(bundle, files, limits));
}
