import { parseTruth } from '@/components/measurement/truth-words';
import { describe, expect, it } from 'vitest';
import { addFiles, changePart } from '@/components/measurement/chosen-files';
import { cellNumber, remapped, withMapping } from '@/components/measurement/columns-table';
import { placeOf } from '@/components/measurement/checks-table';
import { levelCounts, marksOf, partByName, viewOf } from '@/components/measurement/preflight-view';
import {
  nameFromFile,
  preflightSentence,
  storeReason,
  uploadStates,
} from '@/components/measurement/upload-words';
import { preflight, recogniseColumns, parseMeasurement } from '@/lib/measurements';

const lines = (rows: string[]) => new TextEncoder().encode(rows.join('\n'));
const rows = Array.from({ length: 8 }, (_, i) => {
  const lo = 0.01 * 1.3 ** i;
  return `${lo},${lo * 1.3},${(0.1 * i).toFixed(2)},0.05`;
});
const header = 'kappa_lo,kappa_hi,S,S_err';

function viewed(text: string[]) {
  const bytes = lines(text);
  const table = parseMeasurement(bytes, 'points.csv');
  return viewOf(preflight({ file: { bytes, name: 'points.csv' } }), recogniseColumns(table).mapping, 12);
}

const still = { files: 1, reading: false, named: true, share: null };
const size = (name: string, bytes: number) => new File([new Uint8Array(bytes)], name);

describe('what dropped files are taken for', () => {
  it('follows their names', () => {
    expect([partByName('one-field-mocks.csv'), partByName('cov_ok.txt'), partByName('points.csv')]).toEqual([
      'mocks',
      'covariance',
      'file',
    ]);
  });

  it('takes the smallest of several nameless ones for the points', () => {
    const files = addFiles([], [size('b.txt', 900), size('a.txt', 30)], (file) => file.name);
    expect(files.map(({ key, part }) => [key, part])).toEqual([
      ['a.txt', 'file'],
      ['b.txt', 'mocks'],
    ]);
  });

  it('lets a new file take the place of an earlier one of its kind, and mocks that of a covariance', () => {
    const before = addFiles([], [size('points.csv', 30), size('cov.txt', 90)], (file) => file.name);
    const after = addFiles(before, [size('mocks.csv', 400)], (file) => file.name);
    expect(after.map(({ key }) => key)).toEqual(['points.csv', 'mocks.csv']);
  });

  it('changes places where the reader says otherwise', () => {
    const before = addFiles([], [size('points.csv', 30), size('mocks.csv', 90)], (file) => file.name);
    expect(changePart(before, 'mocks.csv', 'file').map(({ key, part }) => [key, part])).toEqual([
      ['points.csv', 'mocks'],
      ['mocks.csv', 'file'],
    ]);
  });
});

describe('columns', () => {
  it('show their first and last number as a file has them', () => {
    expect([cellNumber(0.003), cellNumber(-0.884), cellNumber(1204), cellNumber(NaN)]).toEqual([
      '3.000e−3',
      '−0.884',
      '1\u202f204',
      '–',
    ]);
  });

  it('have a meaning one at a time', () => {
    const { columns } = viewed([header, ...rows]);
    expect(remapped(columns, 3, 'S')).toEqual({ kappaLo: 0, kappaHi: 1, S: 3 });
    expect(remapped(columns, 2, null)).toEqual({ kappaLo: 0, kappaHi: 1, sigma: 3 });
  });

  it('keep a choice that is made before the checks of the one before have ended', () => {
    const { columns } = viewed([header, ...rows]);
    const first = remapped(columns, 2, null);
    const second = remapped(withMapping(columns, first), 3, 'S');
    expect(second).toEqual({ kappaLo: 0, kappaHi: 1, S: 3 });
    expect(withMapping(columns, null)).toEqual(columns);
  });
});

describe('the preflight of a good file', () => {
  const view = viewed([header, ...rows]);

  it('lets it be stored once it has a name', () => {
    expect(view.ok).toBe(true);
    expect(storeReason(view, still)).toBeUndefined();
    expect(storeReason(view, { ...still, named: false })).toBe('Give it a name first.');
    expect(storeReason(view, { ...still, reading: true })).toBe('The files are being read.');
    expect(uploadStates(view, still).columns.word).toBe('4 of 4 used');
  });

  it('counts what it found', () => {
    const { errors, warnings, passed } = levelCounts(view.checks);
    expect(errors).toBe(0);
    expect(warnings).toBeGreaterThan(0);
    expect(passed).toBeGreaterThan(2);
    expect(preflightSentence(view)).toMatch(/passed\. Nothing stops the upload;/);
  });
});

describe('the preflight of a file with one bad cell', () => {
  const bad = [...rows];
  bad[4] = bad[4].replace(/,[^,]*,0\.05$/, ',n/a,0.05');
  const view = viewed([header, ...bad]);

  it('names the line that has to be mended', () => {
    expect(view.ok).toBe(false);
    expect(storeReason(view, still)).toBe('Line 6 has to be mended first.');
    expect(placeOf(view.checks[0])).toBe('line 6, col. 3');
    expect(preflightSentence(view)).toMatch(/^One error,.* The error stops the upload\.$/);
    expect(uploadStates(view, still).preflight).toEqual({ kind: 'bad', word: '1 error' });
    expect(uploadStates(view, still).store.word).toBe('waits for 3');
  });

  it('marks its place in the figure', () => {
    const { gaps, missing } = marksOf(view);
    expect(missing).toEqual([6]);
    expect(gaps).toHaveLength(1);
    expect(gaps[0].word).toBe('line 6: no number');
  });
});

describe('the words beside marks', () => {
  it('are left out where they would run into each other', () => {
    const bad = rows.map((row, i) => (i === 3 || i === 4 ? row.replace(/,[^,]*,0\.05$/, ',n/a,0.05') : row));
    const { gaps, missing } = marksOf(viewed([header, ...bad]));
    expect(missing).toEqual([5, 6]);
    expect(gaps.map(({ word }) => word)).toEqual(['line 5: no number', '']);
  });
});

describe('a name from a file', () => {
  it('is its stem in words', () => {
    expect(nameFromFile('challenge-set_c.csv')).toBe('Challenge set c');
  });
});

describe('values that were put into simulated data', () => {
  it('are read from names and numbers, however they are parted', () => {
    expect(parseTruth('mu1 = 1.3, g: −12;theta=0.5')).toEqual({ values: { mu1: 1.3, g: -12, theta: 0.5 } });
    expect(parseTruth('  ')).toEqual({ values: null });
  });

  it.each([
    ['mu1', '“mu1” isn’t a name and a number; write it as mu1 = 1.3.'],
    ['mu1 = x', '“mu1 = x” isn’t a name and a number; write it as mu1 = 1.3.'],
    ['g = 1, g = 2', 'g is given twice.'],
  ])('are refused with the entry: %j', (text, fault) => {
    expect(parseTruth(text)).toEqual({ fault });
  });
});
