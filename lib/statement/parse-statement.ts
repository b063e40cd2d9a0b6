import { readReference, type Reference } from './reference';

/** Most characters of a statement. */
export const statementLimit = 10_000;

export interface TextPiece {
  kind: 'text';
  text: string;
}

export interface ReferencePiece {
  kind: 'reference';
  reference: Reference;
  /** Where its brace stands, both counted from 1. */
  line: number;
  column: number;
}

export type Piece = TextPiece | ReferencePiece;

/** What is wrong, where, and what to write instead. */
export interface StatementFault {
  line: number;
  column: number;
  message: string;
}

export interface ParsedStatement {
  /** Pieces of each paragraph; faulty references are left out. */
  paragraphs: Piece[][];
  faults: StatementFault[];
}

interface Line {
  pieces: Piece[];
  faults: StatementFault[];
}

function readLine(text: string, line: number): Line {
  const pieces: Piece[] = [];
  const faults: StatementFault[] = [];
  let plain = '';
  const settle = () => {
    if (plain) pieces.push({ kind: 'text', text: plain });
    plain = '';
  };
  for (let at = 0; at < text.length; at++) {
    if (text[at] !== '{') {
      plain += text[at];
      continue;
    }
    if (text[at + 1] === '{') {
      plain += '{';
      at += 1;
      continue;
    }
    const place = { line, column: at + 1 };
    const end = text.indexOf('}', at);
    const again = text.indexOf('{', at + 1);
    if (end < 0 || (again >= 0 && again < end)) {
      const message =
        'The brace isn’t closed on its line. Write {mu1 of fit 1}, or {{ for a brace of your own.';
      faults.push({ ...place, message });
      continue;
    }
    const read = readReference(text.slice(at + 1, end));
    settle();
    if ('message' in read) faults.push({ ...place, message: read.message });
    else pieces.push({ kind: 'reference', reference: read, ...place });
    at = end;
  }
  settle();
  return { pieces, faults };
}

/** Neighbouring words as one piece, without space at the ends of the paragraph. */
function joined(pieces: readonly Piece[]): Piece[] {
  const out: Piece[] = [];
  for (const piece of pieces) {
    const last = out[out.length - 1];
    if (piece.kind === 'text' && last?.kind === 'text')
      out[out.length - 1] = { kind: 'text', text: last.text + piece.text };
    else out.push(piece);
  }
  const trimmed = out.map((piece, i): Piece => {
    if (piece.kind !== 'text') return piece;
    const start = i === 0 ? piece.text.trimStart() : piece.text;
    return { kind: 'text', text: i === out.length - 1 ? start.trimEnd() : start };
  });
  return trimmed.filter((piece) => piece.kind !== 'text' || piece.text !== '');
}

/**
 * Reads a statement: plain text, paragraphs apart by an empty line, references in braces, `{{` for a brace itself. Reads any
 * text without throwing; what can't be read is a fault with its place and remedy.
 *
 * @param text with any kind of line ends
 */
export function parseStatement(text: string): ParsedStatement {
  const lines = text.split(/\r\n|\r|\n/).map((line, i) => ({ text: line, ...readLine(line, i + 1) }));
  const paragraphs: Piece[][] = [];
  let open: Piece[] = [];
  const close = () => {
    const pieces = joined(open);
    if (pieces.length) paragraphs.push(pieces);
    open = [];
  };
  for (const line of lines) {
    if (line.text.trim() === '') close();
    else open.push(...(open.length ? [{ kind: 'text', text: ' ' } as const] : []), ...line.pieces);
  }
  close();
  return { paragraphs, faults: lines.flatMap(({ faults }) => faults) };
}

/** Every reference of a parsed statement, in order. */
export const referencesOf = ({ paragraphs }: Pick<ParsedStatement, 'paragraphs'>): ReferencePiece[] =>
  paragraphs.flat().filter((piece) => piece.kind === 'reference');
