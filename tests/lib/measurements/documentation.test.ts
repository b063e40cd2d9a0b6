import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { expect, it } from 'vitest';
import { findingCodes, remedies } from '@/lib/measurements';

const page = readFileSync(
  fileURLToPath(new URL('../../../docs/measurement-files.md', import.meta.url)),
  'utf8',
);
const rows = page
  .split('\n')
  .map((line) => line.split('|').map((cell) => cell.trim()))
  .filter((cells) => /^`[a-z0-9-]+`$/.test(cells[1] ?? '') && cells.length === 6)
  .map(([, code, level, found, remedy]) => ({ code: code.slice(1, -1), level, found, remedy }));

it('The documentation lists exactly the codes there are, in order, with their remedies', () => {
  // A vertical bar would end its cell.
  expect(Object.values(remedies).filter((remedy) => remedy.includes('|'))).toEqual([]);
  expect(rows.map(({ code, remedy }) => [code, remedy])).toEqual(
    findingCodes.map((code) => [code, remedies[code]]),
  );
});

it('Every code that stops or warns has a remedy; only what passed has none', () => {
  for (const { code, level, remedy, found } of rows) {
    expect([code, remedy === '']).toEqual([code, level === 'ok']);
    expect(found).not.toBe('');
  }
});
