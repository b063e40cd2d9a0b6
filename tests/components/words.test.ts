import { describe, expect, it } from 'vitest';
import { capital, counted, duration, fileSize, inWords, listed, plain } from '@/components/words/counts';
import { clockTime, dayAndMonth } from '@/components/words/dates';
import { shortName } from '@/components/words/people';

describe('words for counts and sizes', () => {
  it('writes counts up to ten in words and groups the others by thin spaces', () => {
    expect([0, 1, 10].map(inWords)).toEqual(['no', 'one', 'ten']);
    expect(inWords(12400)).toBe('12\u202f400');
  });

  it('puts the plural in place', () => {
    expect([counted(1, 'error'), counted(2, 'error'), counted(40, 'bin')]).toEqual([
      'one error',
      'two errors',
      '40 bins',
    ]);
    expect(counted(2, 'quantity', 'quantities')).toBe('two quantities');
  });

  it('lists with a last and', () => {
    expect([listed([]), listed(['a']), listed(['a', 'b', 'c'])]).toEqual(['', 'a', 'a, b and c']);
    expect(capital('two')).toBe('Two');
  });

  it('gives a number the figures that matter, with a true minus', () => {
    expect([plain(0.3), plain(-2.5), plain(0.0033661, 3), plain(1200)]).toEqual([
      '0.3',
      '−2.5',
      '0.00337',
      '1\u202f200',
    ]);
    expect(plain(2.1e7)).toBe('2.1 × 10⁷');
    expect(plain(0)).toBe('0');
  });

  it('writes sizes of files in decimal units and times in their two largest', () => {
    expect([fileSize(384), fileSize(2900), fileSize(384_000), fileSize(64e6)]).toEqual([
      '384\u202fB',
      '2.9\u202fkB',
      '384\u202fkB',
      '64\u202fMB',
    ]);
    expect([duration(41.2), duration(60), duration(190), duration(4800), duration(7200)]).toEqual([
      '41 s',
      '1 min',
      '3 min 10 s',
      '1 h 20 min',
      '2 h',
    ]);
  });
});

describe('words for people and instants', () => {
  it('takes a person by the part before @', () => {
    expect(shortName('t.ibarra@meridian.example')).toBe('t.ibarra');
  });

  it('reads instants in UTC whatever the machine is set to', () => {
    expect(dayAndMonth('2027-03-10T23:59:00.000Z')).toBe('10 March');
    expect(clockTime('2027-03-10T15:02:59.000Z')).toBe('15:02');
  });
});
