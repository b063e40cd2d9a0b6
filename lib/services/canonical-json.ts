import { createHash } from 'node:crypto';

/** JSON with the keys of every object in code-unit order and no white space: one text for one value. */
export function canonicalJson(value: unknown): string {
  return JSON.stringify(value, (_key, part: unknown) =>
    typeof part === 'object' && part !== null && !Array.isArray(part)
      ? Object.fromEntries(Object.entries(part).sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0)))
      : part,
  );
}

/** SHA-256 of the canonical JSON, as hexadecimal digits. */
export const canonicalSha256 = (value: unknown): string =>
  createHash('sha256').update(canonicalJson(value), 'utf8').digest('hex');
