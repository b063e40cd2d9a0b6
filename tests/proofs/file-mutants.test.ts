import { describe, expect } from 'vitest';
import { findingCodes, MeasurementError, parseMatrix, parseMeasurement } from '@/lib/measurements';
import { gzip } from '../lib/measurements/binary-files';
import { load } from '../lib/measurements/measurement-files';
import { generator, mutate } from '../lib/measurements/mutants';
import { proof } from './proof';

const codes = new Set<string>(findingCodes);
/** Slowest reading of one mutant, milliseconds, and what all of them may add to the memory held, bytes. */
const SLOWEST = 2000;
const MOST_MEMORY = 300 * 2 ** 20;

const packed = load('files/clean.csv');
const formats = [
  ['csv', 'files/clean.csv'],
  ['ecsv', 'files/basic.ecsv'],
  ['fits', 'files/table.fits'],
  ['npy', 'files/structured.npy'],
  ['npz', 'files/compressed.npz'],
] as const;

describe('files with injuries', () => {
  for (const [format, name] of formats) {
    proof(
      {
        name: `file-mutants-${format}`,
        claim: `${format} files with small injuries end in a table or a typed error, soon and in little memory`,
        unit: 'mutants',
        gate: 400,
        full: 10_000,
        seed: 101,
      },
      ({ size, seed, record }) => {
        const bytes = format === 'csv' ? gzip(packed.bytes) : load(name).bytes;
        const below = generator(seed);
        const found = { tables: 0, errors: 0, slowest: 0 };
        const before = process.memoryUsage().rss;
        let memory = 0;
        for (let n = 0; n < size; n += 1) {
          const mutant = mutate(format === 'csv' && n % 2 === 0 ? packed.bytes : bytes, below);
          const begun = performance.now();
          for (const read of [
            () => parseMeasurement(mutant, name),
            () => parseMatrix(mutant, name, { part: 'covariance' }),
          ]) {
            try {
              const table = read();
              expect(table.findings.every(({ code }) => codes.has(code))).toBe(true);
              found.tables += 1;
            } catch (error) {
              if (!(error instanceof MeasurementError)) throw error;
              expect(codes.has(error.code)).toBe(true);
              expect(error.remedy).not.toBe('');
              found.errors += 1;
            }
          }
          found.slowest = Math.max(found.slowest, performance.now() - begun);
          memory = Math.max(memory, process.memoryUsage().rss - before);
        }
        record({
          ...found,
          slowestMilliseconds: found.slowest,
          memoryMegabytes: Math.round(memory / 2 ** 20),
        });
        expect(found.slowest).toBeLessThan(SLOWEST);
        expect(memory).toBeLessThan(MOST_MEMORY);
        // Both ends must be met, or the mutants test nothing.
        expect(Math.min(found.tables, found.errors)).toBeGreaterThan(size / 100);
      },
    );
  }
});
