import { MeasurementError } from './errors';
import type { Part } from './types';

/** Largest file that is read, bytes. */
export const MAX_BYTES = 64 * 1024 * 1024;

interface Signature {
  name: string;
  /** First bytes, one character a byte. */
  starts: string;
}

/** First bytes of formats that are not delimited text, by name. Longer ones before those that they begin with. */
const signatures: Signature[] = [
  { name: 'a gzip archive within another', starts: '\x1f\x8b' },
  { name: 'a bzip2 archive', starts: 'BZh' },
  { name: 'an xz archive', starts: '\xfd7zXZ\0' },
  { name: 'a Zstandard archive', starts: '\x28\xb5\x2f\xfd' },
  { name: 'a PDF document', starts: '%PDF-' },
  { name: 'an HDF5 file', starts: '\x89HDF\r\n' },
  { name: 'a Parquet file', starts: 'PAR1' },
  { name: 'an old Excel workbook', starts: '\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1' },
  { name: 'a PNG image', starts: '\x89PNG\r\n' },
  { name: 'a rich-text document', starts: '{\\rtf' },
];

function refuse(name: string, part: Part): MeasurementError {
  return new MeasurementError('format-not-read', `This is ${name}, which is not read.`, {
    part,
    line: 1,
  });
}

/** A zip archive by what lies in it: an Excel workbook, an OpenDocument table, or just zip. */
function nameOfZip(start: string, fileName: string): string {
  if (/\[Content_Types\]|xl\//.test(start) || /\.xls[xm]$/i.test(fileName)) return 'an Excel workbook';
  if (/opendocument/.test(start) || /\.ods$/i.test(fileName)) return 'an OpenDocument table';
  return 'a zip archive';
}

/** Refuses an empty file (`empty-file`) and one beyond the limit (`file-too-large`). */
export function requireSize(bytes: Uint8Array, part: Part, maxBytes = MAX_BYTES): void {
  if (bytes.length > maxBytes) {
    const limit = `${Math.floor(maxBytes / 1024 / 1024)} MB`;
    throw new MeasurementError('file-too-large', `The file is larger than ${limit}.`, { part });
  }
  if (bytes.length === 0) throw new MeasurementError('empty-file', 'The file is empty.', { part });
}

/**
 * Throws unless the bytes are delimited text: formats that are recognised by their first
 * bytes are refused by name (`format-not-read`), UTF-16 and UTF-32 as `wrong-encoding`, other binary content as
 * `not-text` with its line. What the file is called matters only to name what a zip archive holds.
 */
export function refuseOtherFormats(bytes: Uint8Array, fileName: string, part: Part): void {
  // Byte by byte: the decoder that is called latin1 is Windows-1252 and would change the bytes of signatures.
  const start = String.fromCharCode(...bytes.subarray(0, 4096));
  if (/^(\xff\xfe|\xfe\xff|\0\0\xfe\xff)/.test(start) || looksLikeUtf16(bytes)) {
    throw new MeasurementError('wrong-encoding', 'The file is UTF-16 or UTF-32 text.', { part, line: 1 });
  }
  if (/^PK(\x03\x04|\x05\x06|\x07\x08)/.test(start)) throw refuse(nameOfZip(start, fileName), part);
  const known = signatures.find((signature) => start.startsWith(signature.starts));
  if (known) throw refuse(known.name, part);
  const words = start.replace(/^\xef\xbb\xbf/, '').trimStart();
  if (/^<(!doctype\s+html|html|head|body)/i.test(words)) throw refuse('an HTML page', part);
  if (words.startsWith('<')) throw refuse('an XML document', part);
  if (/^[{[]\s*["{[\]}\-\d]/.test(words)) throw refuse('a JSON document', part);
  refuseControlCharacters(bytes, part);
}

/** Text of mostly Latin characters in UTF-16 without a mark: every second byte is zero. */
function looksLikeUtf16(bytes: Uint8Array): boolean {
  const n = Math.min(bytes.length & ~1, 64);
  if (n < 8) return false;
  let even = 0;
  let odd = 0;
  for (let i = 0; i < n; i += 2) {
    if (bytes[i] === 0) even += 1;
    if (bytes[i + 1] === 0) odd += 1;
  }
  return Math.max(even, odd) > 0.4 * n && Math.min(even, odd) === 0;
}

function refuseControlCharacters(bytes: Uint8Array, part: Part): void {
  let line = 1;
  for (let i = 0; i < bytes.length; i += 1) {
    const byte = bytes[i];
    if (byte >= 32) continue;
    if (byte === 10 || (byte === 13 && bytes[i + 1] !== 10)) line += 1;
    // Tab, vertical tab, form feed and carriage return are white space.
    else if (!(byte >= 9 && byte <= 13)) {
      const what = byte === 0 ? 'a zero byte' : 'a control character';
      throw new MeasurementError('not-text', `The file is not text: line ${line} holds ${what}.`, {
        part,
        line,
      });
    }
  }
}

/** Text without byte-order mark. Not UTF-8: read as Windows-1252, which keeps every ASCII character, and said so. */
export function decodeText(bytes: Uint8Array): { text: string; utf8: boolean } {
  try {
    return { text: new TextDecoder('utf-8', { fatal: true }).decode(bytes), utf8: true };
  } catch {
    return { text: new TextDecoder('windows-1252').decode(bytes), utf8: false };
  }
}

const minusSigns = /^[−–]/;
const plain = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const fortran = /^([+-]?(?:\d+\.?\d*|\.\d+))(?:[dDqQ]([+-]?\d+)|([+-]\d{3}))$/;
const notFinite = /^[+-]?(?:nan(?:\(\w*\))?|inf(?:inity)?|1\.#(?:ind|inf|qnan)0*|∞)$/i;
const absent = /^(?:n\/?a|null|none|-+|\.|\*+|\?)$/i;

/** What a cell is: a number, an empty cell, a value that says "not finite" (nan, inf), or something else. */
export type Cell = number | 'empty-cell' | 'not-finite' | 'not-a-number';

/**
 * Reads one cell. Decimal point; exponent e, E, d, D, q, Q, or Fortran's three digits without a letter
 * (1.0-103); either minus sign. A number too large for a double is not finite.
 */
export function readCell(cell: string): Cell {
  let text = cell.trim();
  if (text === '') return 'empty-cell';
  if (minusSigns.test(text)) text = `-${text.slice(1)}`;
  if (plain.test(text)) return finite(Number(text));
  const match = fortran.exec(text);
  if (match) return finite(Number(`${match[1]}e${match[2] ?? match[3]}`));
  return notFinite.test(text) ? 'not-finite' : 'not-a-number';
}

/** A cell with a decimal comma, 1,25; without a point. Whole numbers are the same either way and give false. */
export function hasDecimalComma(cell: string): boolean {
  return /^\s*[+\-−–]?\d+,\d+(?:[eEdD][+-]?\d+)?\s*$/.test(cell);
}

/** True for a word that can be a name: not a number, not empty, and not a sign for "no value" (n/a, null, –). */
export function isWord(cell: string): boolean {
  return readCell(cell) === 'not-a-number' && !absent.test(cell.trim()) && !hasDecimalComma(cell);
}

function finite(value: number): Cell {
  return Number.isFinite(value) ? value : 'not-finite';
}
