'use client';

import { useEffect, useMemo, useState } from 'react';
import useSWR from 'swr';
import { read, send } from '@/components/api/request';
import type { Notebook, Statement, StatementPiece, TypesetStatement } from '@/lib/schemas';
import { parseStatement, referencesOf, type StatementFault } from '@/lib/statement/parse-statement';
import { writeReference } from '@/lib/statement/reference';

export type ValuePiece = Extract<StatementPiece, { kind: 'value' }>;

const pathOf = ({ id }: Pick<Notebook, 'id'>) => `/api/v1/notebooks/${id}/statement`;

/** What the numbers hang on beside the words: a revision makes fits old, and a fit comes to its end. */
const standing = ({ revision, fits }: Notebook) =>
  [revision, ...fits.map(({ number, status }) => `${number} ${status}`)].join(' ');

/** The words with the numbers of now; `at` gives them as they stood at an earlier revision. */
export function useStatement(notebook: Notebook, initial: Statement, at: number | null): Statement | null {
  const [first] = useState(() => standing(notebook));
  const state = standing(notebook);
  const { data } = useSWR(
    [at === null ? pathOf(notebook) : `${pathOf(notebook)}?revision=${at}`, state],
    ([path]) => read<Statement>(path),
    {
      fallbackData: at === null && state === first ? initial : undefined,
      revalidateOnMount: at !== null || state !== first,
      revalidateOnFocus: false,
      keepPreviousData: at === null,
    },
  );
  return data ?? null;
}

/** A value once the hand has rested for `milliseconds`: nobody is told of a brace that they are about to close. */
function useRested<T>(value: T, milliseconds: number): T {
  const [rested, setRested] = useState(value);
  useEffect(() => {
    const timer = setTimeout(() => setRested(value), milliseconds);
    return () => clearTimeout(timer);
  }, [value, milliseconds]);
  return rested;
}

const rest = 700;

export interface TypesetDraft {
  /** Words at once; a reference whose number isn't known yet, or that names nothing, stands as it is typed. */
  paragraphs: (StatementPiece | { kind: 'typed'; reference: string; wrong: boolean })[][];
  /** Everything that keeps the words from being saved, in order. */
  faults: StatementFault[];
  /** The first of them, once the hand has rested. */
  told: StatementFault | null;
}

/** Numbers of the references, one a line, and what is wrong with those that name nothing. */
async function askNumbers(path: string, words: string) {
  const answer = await send<TypesetStatement>('POST', path, { text: words });
  const lines = words.split('\n');
  const pieces = answer.paragraphs.flat().flatMap((piece) => (piece.kind === 'value' ? [piece] : []));
  return {
    values: new Map(pieces.map((piece) => [piece.reference, piece])),
    wrong: new Map(answer.faults.map(({ line, message }) => [lines[line - 1], message])),
  };
}

/** Words while they are written: read here, their numbers asked for when a reference is new. */
export function useTypeset(notebook: Notebook, text: string): TypesetDraft {
  const parsed = useMemo(() => parseStatement(text), [text]);
  const references = [...new Set(referencesOf(parsed).map(({ reference }) => writeReference(reference)))];
  const asked = references.join('\n');
  const path = `${pathOf(notebook)}/typeset`;
  const stand = standing(notebook);
  const [data, setData] = useState<Awaited<ReturnType<typeof askNumbers>> | null>(null);
  useEffect(() => {
    if (!asked) return undefined;
    let wanted = true;
    // Where it fails the numbers before stand on, and saving the words says what is wrong.
    void askNumbers(path, asked).then(
      (found) => (wanted ? setData(found) : undefined),
      () => undefined,
    );
    return () => {
      wanted = false;
    };
  }, [path, asked, stand]);
  const faults = [
    ...parsed.faults,
    ...referencesOf(parsed).flatMap(({ reference, line, column }) => {
      const message = data?.wrong.get(writeReference(reference));
      return message === undefined ? [] : [{ line, column, message }];
    }),
  ].sort((a, b) => a.line - b.line || a.column - b.column);
  const first = faults[0] ?? null;
  const key = first && JSON.stringify(first);
  const rested = useRested(key, rest);
  return {
    paragraphs: parsed.paragraphs.map((pieces) =>
      pieces.map((piece) => {
        if (piece.kind === 'text') return piece;
        const reference = writeReference(piece.reference);
        const value = data?.wrong.has(reference) ? undefined : data?.values.get(reference);
        return value ?? { kind: 'typed' as const, reference, wrong: data?.wrong.has(reference) ?? false };
      }),
    ),
    faults,
    told: key !== null && key === rested ? first : null,
  };
}
