import { storage } from '@/storage';
import type { StoredFile } from '@/models';
import { AppError } from '@/lib/errors';
import { log } from '@/lib/log';
import { fileParts } from '@/lib/schemas';

/** One part of an upload, in memory. */
export interface UploadedPart {
  /** As the sender named it; empty where the part had no name. */
  fileName: string;
  bytes: Uint8Array;
}

export type FilePart = StoredFile['part'];

/** Control and bidirectional characters would let a name pose as another one. */
const unprintable = /[\p{Cc}\p{Cf}\p{Zl}\p{Zp}\p{Cs}]/gu;

/** A file's own name without folders, fit to be shown; it never becomes part of an object's key. */
export function cleanFileName(name: string, part: FilePart): string {
  const last = name.split(/[\\/]/).at(-1) ?? '';
  const clean = Array.from(last.replace(unprintable, '').trim()).slice(0, 200).join('');
  return clean === '' ? part : clean;
}

/** What a measurement is called where nobody named it: its file, without the extension. */
export function nameFromFile(fileName: string): string {
  const base = fileName.replace(/\.[A-Za-z0-9]{1,8}$/, '');
  return Array.from(base === '' ? fileName : base)
    .slice(0, 120)
    .join('');
}

/** Begins the keys of all uploaded files. */
export const filesPrefix = 'measurements/';

const keyOf = (ids: { measurementId: string; versionId: string }, part: FilePart): string =>
  `${filesPrefix}${ids.measurementId}/${ids.versionId}/${part}`;

/** The version that a key was made for; null for a key that isn't one of ours. */
export const versionOfKey = (key: string): string | null =>
  /^measurements\/[0-9a-f-]{36}\/([0-9a-f-]{36})\/[A-Za-z]+$/.exec(key)?.[1] ?? null;

/** Removes objects that no row points at. What can't be removed is logged and left to the sweep of stray files. */
export async function discardFiles(files: readonly StoredFile[]): Promise<void> {
  for (const { key } of files) {
    await storage()
      .delete(key)
      .catch((error: unknown) => log.error({ err: error, key }, 'an object without a row was left behind'));
  }
}

/**
 * Stores the files of one version, each read back and compared. Keys are made of ids alone. Either all are stored or
 * none; `unavailable` where the object store fails.
 */
export async function storeFiles(
  ids: { measurementId: string; versionId: string },
  parts: Readonly<Partial<Record<FilePart, UploadedPart>>>,
): Promise<StoredFile[]> {
  const stored: StoredFile[] = [];
  try {
    for (const part of fileParts) {
      const upload = parts[part];
      if (!upload) continue;
      const key = keyOf(ids, part);
      const { sha256, bytes } = await storage().putVerified(key, upload.bytes);
      stored.push({ part, fileName: cleanFileName(upload.fileName, part), key, bytes, sha256 });
    }
  } catch (error) {
    await discardFiles(stored);
    const message = 'The object store is away for a moment. Nothing was stored; try again shortly.';
    throw new AppError('unavailable', message, [], { cause: error });
  }
  return stored;
}
