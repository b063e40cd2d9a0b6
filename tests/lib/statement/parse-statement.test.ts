import { describe, expect, it } from 'vitest';
import { createRng } from '@/lib/sampler';
import { parseStatement, referencesOf, type Piece } from '@/lib/statement/parse-statement';
import { facts, readReference, statistics, writeReference, type Reference } from '@/lib/statement/reference';

const text = (words: string): Piece => ({ kind: 'text', text: words });
const marginal = (
  quantity: string,
  fit: number,
  statistic: (typeof statistics)[number] = 'summary',
): Reference => ({
  kind: 'marginal',
  statistic,
  quantity,
  fit,
});

describe('a reference', () => {
  it('is read back from how it is written, for every fact and every way of giving a number', () => {
    const all: Reference[] = [
      ...facts.map((fact): Reference => ({ kind: 'fact', fact, fit: 12 })),
      ...statistics.map((statistic) => marginal('m1_over_H', 3, statistic)),
    ];
    for (const reference of all)
      expect(readReference(writeReference(reference).slice(1, -1))).toEqual(reference);
  });

  it('may be typed with any spaces and capitals', () => {
    expect(readReference(' 95% mu1  of Fit 2 ')).toEqual(marginal('mu1', 2, '95 %'));
    expect(readReference('95\u202f%\u00a0mu1 of fit 2')).toEqual(marginal('mu1', 2, '95 %'));
    expect(readReference('r-hat theta of fit 2')).toEqual(marginal('theta', 2, 'R-hat'));
  });

  it.each([
    ['mu1', 'doesn’t say which fit'],
    ['mu1 of fit 0', '“0” is no number of a fit'],
    ['mu1 of fit two', '“two” is no number of a fit'],
    ['mu1 of fit 1234567', 'is no number of a fit'],
    ['average mu1 of fit 1', '“average” is no way to give mu1. Write median, mean, 68 %'],
    ['1st of fit 1', '“1st” names no quantity'],
    ['of fit 1', 'names no quantity'],
    ['', 'doesn’t say which fit'],
  ])('“%s” is a fault that says what to write', (body, said) => {
    const read = readReference(body);
    expect('message' in read && read.message).toContain(said);
  });
});

describe('a statement', () => {
  it('is paragraphs apart by empty lines; a single line end is a space', () => {
    const { paragraphs, faults } = parseStatement('\n We searched\nthe field. \n\n \r\nNothing is there.\n');
    expect(paragraphs).toEqual([[text('We searched the field.')], [text('Nothing is there.')]]);
    expect(faults).toEqual([]);
    expect(parseStatement('').paragraphs).toEqual([]);
  });

  it('holds references with their place, spaces beside them kept', () => {
    const { paragraphs } = parseStatement('First.\n\nμ = {mu1 of fit 2}, from {draws of fit 2} draws');
    expect(paragraphs[1]).toEqual([
      text('μ = '),
      { kind: 'reference', reference: marginal('mu1', 2), line: 3, column: 5 },
      text(', from '),
      { kind: 'reference', reference: { kind: 'fact', fact: 'draws', fit: 2 }, line: 3, column: 26 },
      text(' draws'),
    ]);
  });

  it('has a brace of its own where two are typed, and closing braces as they are', () => {
    expect(parseStatement('a set {{1, 2} of two').paragraphs).toEqual([[text('a set {1, 2} of two')]]);
  });

  it('says every fault with line, character and remedy, and still reads the rest', () => {
    const { paragraphs, faults } = parseStatement('one {mu1 of fit 1\ntwo {nonsense} and {g of fit 1}');
    expect(faults.map(({ line, column }) => [line, column])).toEqual([
      [1, 5],
      [2, 5],
    ]);
    expect(faults[0].message).toContain('isn’t closed on its line');
    expect(paragraphs.flat().filter(({ kind }) => kind === 'reference')).toHaveLength(1);
  });

  it('reads whatever is typed without throwing, and every reference again as it writes it', () => {
    const rng = createRng('statements that nobody would write');
    const parts = [
      '{',
      '}',
      '{{',
      'mu1',
      ' of fit ',
      '2',
      '95 %',
      '\n',
      '\r\n',
      '\n\n',
      ' ',
      '\u00a0',
      'gate',
      'μ',
      '{mu1 of fit 1}',
      '{draws of fit 3}',
      '😀',
    ];
    let read = 0;
    for (let round = 0; round < 4_000; round++) {
      const length = Math.floor(rng.uniform() * 14);
      const typed = Array.from({ length }, () => parts[Math.floor(rng.uniform() * parts.length)]).join('');
      const lines = typed.split(/\r\n|\r|\n/);
      const parsed = parseStatement(typed);
      for (const { line, column } of [...parsed.faults, ...referencesOf(parsed)]) {
        expect(lines[line - 1][column - 1], JSON.stringify(typed)).toBe('{');
      }
      for (const { reference } of referencesOf(parsed)) {
        read += 1;
        expect(parseStatement(writeReference(reference))).toMatchObject({
          paragraphs: [[{ kind: 'reference', reference }]],
          faults: [],
        });
      }
      for (const pieces of parsed.paragraphs)
        expect(pieces.every((p) => p.kind !== 'text' || p.text !== '')).toBe(true);
      // Nothing that was typed outside of braces is lost.
      if (!typed.includes('{')) {
        const said = parsed.paragraphs
          .flat()
          .map((p) => (p.kind === 'text' ? p.text : ''))
          .join('');
        expect(said.replace(/\s/g, '')).toBe(typed.replace(/\s/g, ''));
      }
    }
    expect(read).toBeGreaterThan(1_000);
  });
});
