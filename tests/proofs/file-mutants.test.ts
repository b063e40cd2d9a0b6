import { describe, expect } from 'vitest';
import { findingCodes, MeasurementError, parseMatrix, parseMeasurement } from '@/lib/measurements';
import { gzip } from '../lib/measurements/binary-files';
import { load } from '../lib/measurements/measurement-files';
import { generator, mutate } from '../lib/measurements/mutants';
import { proof } from './proof';

const codes = new Set<string>(findingCodes);
/**
 * Slowest reading of one mutant, milliseconds of the processor: reading waits for nothing, and a shared machine takes time
 * away. And what all of one format may add to the memory held, MB.
 */
const SLOWEST = 2000;
const MOST_MEMORY = 300;

const packed = load('files/clean.csv');
const formats = [
  ['csv', 'files/clean.csv'],
  ['ecsv', 'files/basic.ecsv'],
  ['fits', 'files/table.fits'],
  ['npy', 'files/structured.npy'],
  ['npz', 'files/compressed.npz'],
] as const;

type Format = (typeof formats)[number];

/** Reads mutants of one format, each as a measurement and as a matrix. */
function readMutants([format, name]: Format, size: number, seed: number) {
  const bytes = format === 'csv' ? gzip(packed.bytes) : load(name).bytes;
  const below = generator(seed);
  const found = { tables: 0, errors: 0, slowestMilliseconds: 0, memoryMegabytes: 0 };
  const before = process.memoryUsage().rss;
  for (let n = 0; n < size; n += 1) {
    const mutant = mutate(format === 'csv' && n % 2 === 0 ? packed.bytes : bytes, below);
    const begun = process.cpuUsage();
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
    const { user, system } = process.cpuUsage(begun);
    found.slowestMilliseconds = Math.max(found.slowestMilliseconds, (user + system) / 1000);
    const grown = (process.memoryUsage().rss - before) / 2 ** 20;
    found.memoryMegabytes = Math.max(found.memoryMegabytes, Math.round(grown));
  }
  return found;
}

describe('files with injuries', () => {
  proof(
    {
      name: 'file-mutants',
      claim: 'files with small injuries end in a table or a typed error, soon and in little memory',
      unit: 'mutants of each format',
      gate: 400,
      full: 10_000,
      seed: 101,
    },
    ({ size, seed, record }) => {
      for (const format of formats) {
        const found = readMutants(format, size, seed);
        record({ [format[0]]: found });
        expect(found.slowestMilliseconds).toBeLessThan(SLOWEST);
        expect(found.memoryMegabytes).toBeLessThan(MOST_MEMORY);
        // Both ends must be met, or the mutants test nothing.
        expect(Math.min(found.tables, found.errors)).toBeGreaterThan(size / 100);
      }
    },
  );
});
