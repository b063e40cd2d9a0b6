import type { State } from '@/components/ui/state-word';
import type { Statement } from '@/lib/schemas';

/** How the words stand: not written, waiting for numbers, resting on fits that don't stand any more, or settled. */
export function statementState(
  statement: Pick<Statement, 'paragraphs' | 'written'>,
  changed: boolean,
): State {
  if (changed) return { kind: 'open', word: 'being written' };
  const { paragraphs, written } = statement;
  if (!written || !paragraphs.length) return { kind: 'open', word: 'not written' };
  const values = paragraphs.flat().flatMap((piece) => (piece.kind === 'value' ? [piece] : []));
  if (values.some(({ value }) => value === null)) return { kind: 'wait', word: 'waits for numbers' };
  if (values.some(({ marks }) => marks.includes('not-converged')))
    return { kind: 'warn', word: 'not converged' };
  if (values.some(({ marks }) => marks.length)) return { kind: 'old', word: 'of an earlier fit' };
  return { kind: 'ok', word: `revision ${written.revision}` };
}

/** The folded section's sentence: the first words. */
export function statementSentence({ paragraphs }: Pick<Statement, 'paragraphs'>): string {
  const [first] = paragraphs;
  if (!first) return 'No words yet.';
  const words = first
    .map((piece) => (piece.kind === 'text' ? piece.text : (piece.value ?? 'no value')))
    .join('');
  return words.length > 140 ? `${words.slice(0, 137).trimEnd()} …` : words;
}
