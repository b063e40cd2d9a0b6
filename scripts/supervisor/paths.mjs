import { chmodSync, mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs';
import { createHash } from 'node:crypto';
import { fileURLToPath } from 'node:url';
import path from 'node:path';

export const root = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '');

/** The private folder of one instance: data, secrets, logs. Mode 0700. */
export function stateFolder() {
  const folder = path.resolve(root, process.env.BEATNOTE_STATE ?? '.state');
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  chmodSync(folder, 0o700);
  for (const part of ['log', 'pid', 'mail', 'objects', 'redis']) {
    mkdirSync(path.join(folder, part), { recursive: true, mode: 0o700 });
  }
  return folder;
}

/**
 * Sockets have short names (108 bytes at most), whatever the state folder is called: they stand in a private folder
 * named by the state folder's hash.
 */
export function socketFolder(state) {
  const inside = path.join(state, 'run');
  if (inside.length < 80) {
    mkdirSync(inside, { recursive: true, mode: 0o700 });
    return inside;
  }
  const name = createHash('sha256').update(state).digest('hex').slice(0, 16);
  const outside = path.join(process.env.XDG_RUNTIME_DIR ?? '/tmp', `beatnote-${process.getuid()}-${name}`);
  mkdirSync(outside, { recursive: true, mode: 0o700 });
  return outside;
}

export function readJson(file, otherwise) {
  try {
    return JSON.parse(readFileSync(file, 'utf8'));
  } catch {
    return otherwise;
  }
}

/** Writes a file that only its owner can read, all of it or none. */
export function writePrivateJson(file, value) {
  const draft = `${file}.${process.pid}.new`;
  writeFileSync(draft, `${JSON.stringify(value, null, 1)}\n`, { mode: 0o600 });
  renameSync(draft, file);
}
