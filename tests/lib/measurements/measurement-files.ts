import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { MeasurementError, type Finding, type UploadedFile } from '@/lib/measurements';

const folder = fileURLToPath(new URL('../../data/measurements/', import.meta.url));

/** A file of tests/data/measurements as it would be handed in. */
export function load(name: string): UploadedFile {
  return { bytes: new Uint8Array(readFileSync(`${folder}${name}`)), name };
}

/** Its text. */
export function loadText(name: string): string {
  return new TextDecoder().decode(load(name).bytes);
}

/** Text as a file. */
export function file(text: string, name = 'data.csv'): UploadedFile {
  return { bytes: new TextEncoder().encode(text), name };
}

/** The text with line `line` (1-based) replaced. */
export function withLine(text: string, line: number, replace: (old: string) => string): string {
  const lines = text.split('\n');
  lines[line - 1] = replace(lines[line - 1]);
  return lines.join('\n');
}

/** The MeasurementError that a step throws. */
export function errorOf(step: () => unknown): MeasurementError {
  try {
    step();
  } catch (error) {
    if (error instanceof MeasurementError) return error;
    throw error;
  }
  throw new Error('No error was thrown.');
}

/** Code, line and column of each finding of a level. */
export function placesOf(findings: Finding[], level: Finding['level']): [string, number?, number?][] {
  return findings
    .filter((found) => found.level === level)
    .map(({ code, line, column }) =>
      column !== undefined ? [code, line, column] : line !== undefined ? [code, line] : [code],
    );
}
