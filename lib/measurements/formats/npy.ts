import type { Part } from '../types';
import { damaged, leftOut, notRead, requireCells, type NumberTable } from './table';

/**
 * Arrays in NumPy's NPY format, versions 1.0 to 3.0 (numpy.lib.format, its public description): magic, version, length of the header,
 * a Python dictionary with `descr`, `fortran_order` and `shape`, then the numbers. Any byte order, C or Fortran layout, whole
 * numbers and floats of every size but 16 bytes, and records of such fields. Arrays of objects are pickles and are refused:
 * nothing is run.
 */

/** Longest header that is read, bytes; NumPy itself warns beyond 10,000. */
const MAX_HEADER = 1_000_000;

/** How one number lies in the bytes. */
interface Scalar {
  size: number;
  read(view: DataView, at: number): number;
}

interface Field {
  name: string;
  offset: number;
  /** Null for what holds no single number. */
  scalar: Scalar | null;
  what: string;
}

interface Layout {
  itemSize: number;
  /** One unnamed field for a plain array. */
  fields: Field[];
  named: boolean;
}

/** An array as it lies in the file. */
export interface NpyArray {
  shape: number[];
  named: boolean;
  /** Reads number `i` in row-major order of field `f`. */
  at(i: number, f: number): number;
  fields: readonly Field[];
  trailing: number;
}

export function isNpy(bytes: Uint8Array): boolean {
  return bytes[0] === 0x93 && String.fromCharCode(...bytes.subarray(1, 6)) === 'NUMPY';
}

/** Reads the head of an array and how to get at its numbers; throws MeasurementError where it is no array of numbers. */
export function openNpy(bytes: Uint8Array, part: Part): NpyArray {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const major = bytes[6];
  if (bytes.length < 10 || !isNpy(bytes) || major < 1 || major > 3) {
    throw damaged(part, 'The array has no header that can be read.');
  }
  const wide = major > 1;
  if (wide && bytes.length < 12) throw damaged(part, 'The array ends within its header.');
  const length = wide ? view.getUint32(8, true) : view.getUint16(8, true);
  const begin = wide ? 12 : 10;
  if (length > MAX_HEADER || begin + length > bytes.length) {
    throw damaged(part, 'The array ends within its header.');
  }
  const text = new TextDecoder(major === 3 ? 'utf-8' : 'windows-1252').decode(
    bytes.subarray(begin, begin + length),
  );
  const header = readLiteral(text, part);
  const { descr, fortran_order: fortran, shape } = asHeader(header, part);
  const layout = layoutOf(descr, part);
  const count = shape.reduce((product, n) => product * n, 1);
  requireCells(part, count, layout.fields.length);
  const start = begin + length;
  const needed = count * layout.itemSize;
  if (start + needed > bytes.length) {
    throw damaged(
      part,
      `The array is cut off: ${needed} bytes are announced, ${bytes.length - start} are there.`,
    );
  }
  const place = fortran && shape.length === 2 ? transpose(shape) : (i: number): number => i;
  return {
    shape,
    named: layout.named,
    fields: layout.fields,
    trailing: bytes.length - start - needed,
    at: (i, f) => {
      const { scalar, offset } = layout.fields[f];
      return scalar ? scalar.read(view, start + place(i) * layout.itemSize + offset) : NaN;
    },
  };
}

function transpose([rows, columns]: number[]): (i: number) => number {
  return (i) => (i % columns) * rows + Math.floor(i / columns);
}

/** The array as a table: records by field, two axes as rows and columns, one axis as one column. */
export function tableOfNpy(array: NpyArray, part: Part): NumberTable {
  const { shape, fields, named } = array;
  if (shape.length === 0 || shape.length > 2 || (named && shape.length > 1)) {
    throw notRead(part, `an array of ${shape.length} axes`, 'Write an array of rows and columns.');
  }
  const rows = shape[0];
  const findings = fields.flatMap((field) => (field.scalar ? [] : [leftOut(part, field.name, field.what)]));
  if (named) {
    const kept = fields.flatMap((field, f) => (field.scalar ? [{ name: field.name, f }] : []));
    return {
      columns: kept.map(({ name }) => ({ name })),
      rows,
      data: kept.map(({ f }) => Float64Array.from({ length: rows }, (_, i) => array.at(i, f))),
      findings,
    };
  }
  if (!fields[0].scalar) throw notRead(part, `an array that holds ${fields[0].what}`);
  const width = shape.length === 2 ? shape[1] : 1;
  return {
    columns: Array.from({ length: width }, () => ({ name: '' })),
    rows,
    data: Array.from({ length: width }, (_, j) =>
      Float64Array.from({ length: rows }, (__, i) => array.at(i * width + j, 0)),
    ),
    findings,
  };
}

type Literal = string | number | boolean | null | Literal[] | { [key: string]: Literal };

function asHeader(value: Literal, part: Part): { descr: Literal; fortran_order: boolean; shape: number[] } {
  const fault = () => damaged(part, 'The header of the array says no type, layout and shape.');
  if (value === null || typeof value !== 'object' || Array.isArray(value)) throw fault();
  const { descr, fortran_order: fortran, shape } = value;
  if (descr === undefined || typeof fortran !== 'boolean' || !Array.isArray(shape)) throw fault();
  const sizes = shape.map((n) => {
    if (typeof n !== 'number' || !Number.isSafeInteger(n) || n < 0) throw fault();
    return n;
  });
  if (sizes.length > 32) throw fault();
  return { descr, fortran_order: fortran, shape: sizes };
}

/** Python's literals as NumPy writes them: strings, whole numbers, True, False, None, lists, tuples, dictionaries. */
function readLiteral(text: string, part: Part): Literal {
  let at = 0;
  let depth = 0;
  const fault = () => damaged(part, `The header of the array can’t be read at its character ${at + 1}.`);
  const blank = () => {
    while (/\s/.test(text[at] ?? '')) at += 1;
  };
  const list = (close: string): Literal[] => {
    const items: Literal[] = [];
    at += 1;
    for (blank(); text[at] !== close; blank()) {
      items.push(value());
      blank();
      if (text[at] === ',') at += 1;
      else if (text[at] !== close) throw fault();
    }
    at += 1;
    return items;
  };
  const dictionary = (): Literal => {
    const entries: [string, Literal][] = [];
    at += 1;
    for (blank(); text[at] !== '}'; blank()) {
      const key = value();
      blank();
      if (typeof key !== 'string' || text[at] !== ':') throw fault();
      at += 1;
      entries.push([key, value()]);
      blank();
      if (text[at] === ',') at += 1;
      else if (text[at] !== '}') throw fault();
    }
    at += 1;
    return Object.fromEntries(entries);
  };
  const value = (): Literal => {
    blank();
    depth += 1;
    if (depth > 20 || at >= text.length) throw fault();
    const sign = text[at];
    let read: Literal;
    if (sign === '{') read = dictionary();
    else if (sign === '[') read = list(']');
    else if (sign === '(') read = list(')');
    else {
      const rest = text.slice(at, at + 4000);
      const word = /^(?:u?'((?:[^'\\]|\\.)*)'|u?"((?:[^"\\]|\\.)*)"|(-?\d+)L?|(True|False|None))/.exec(rest);
      if (!word) throw fault();
      at += word[0].length;
      if (word[3] !== undefined) read = Number(word[3]);
      else if (word[4] !== undefined) read = word[4] === 'None' ? null : word[4] === 'True';
      else read = (word[1] ?? word[2]).replace(/\\(.)/g, '$1');
    }
    depth -= 1;
    return read;
  };
  const read = value();
  blank();
  if (at < text.replace(/\0+$/, '').length) throw fault();
  return read;
}

function layoutOf(descr: Literal, part: Part): Layout {
  if (typeof descr === 'string') {
    const { size, scalar, what } = typeOf(descr, part);
    return { itemSize: size, named: false, fields: [{ name: '', offset: 0, scalar, what }] };
  }
  if (!Array.isArray(descr) || descr.length === 0)
    throw damaged(part, 'The array has no type that can be read.');
  let offset = 0;
  const fields: Field[] = [];
  for (const entry of descr) {
    if (!Array.isArray(entry) || entry.length < 2)
      throw damaged(part, 'A field of the array has no name and type.');
    const [label, type, shape] = entry;
    const name = Array.isArray(label) ? label[label.length - 1] : label;
    if (typeof name !== 'string') throw damaged(part, 'A field of the array has no name.');
    const inner: { size: number; scalar: Scalar | null; what: string } =
      typeof type === 'string'
        ? typeOf(type, part)
        : { size: layoutOf(type, part).itemSize, scalar: null, what: 'records' };
    const repeat = Array.isArray(shape)
      ? shape.reduce<number>((product, n) => product * (typeof n === 'number' ? n : NaN), 1)
      : 1;
    if (!Number.isSafeInteger(repeat) || repeat < 0) throw damaged(part, 'A field of the array has no size.');
    const single = shape === undefined || repeat === 1;
    // Padding has no name and no meaning.
    if (name !== '' || inner.scalar !== null) {
      fields.push({
        name,
        offset,
        scalar: single ? inner.scalar : null,
        what: single ? inner.what : 'arrays',
      });
    }
    offset += inner.size * repeat;
  }
  if (!Number.isSafeInteger(offset)) throw damaged(part, 'A record of the array has no size.');
  return { itemSize: offset, named: true, fields };
}

function half(bits: number): number {
  const sign = bits & 0x8000 ? -1 : 1;
  const exponent = (bits >> 10) & 31;
  const fraction = bits & 1023;
  if (exponent === 0) return sign * fraction * 2 ** -24;
  if (exponent === 31) return fraction === 0 ? sign * Infinity : NaN;
  return sign * (1 + fraction / 1024) * 2 ** (exponent - 15);
}

const readers: Record<string, (view: DataView, at: number, little: boolean) => number> = {
  f2: (view, at, little) => half(view.getUint16(at, little)),
  f4: (view, at, little) => view.getFloat32(at, little),
  f8: (view, at, little) => view.getFloat64(at, little),
  i1: (view, at) => view.getInt8(at),
  i2: (view, at, little) => view.getInt16(at, little),
  i4: (view, at, little) => view.getInt32(at, little),
  i8: (view, at, little) => Number(view.getBigInt64(at, little)),
  u1: (view, at) => view.getUint8(at),
  u2: (view, at, little) => view.getUint16(at, little),
  u4: (view, at, little) => view.getUint32(at, little),
  u8: (view, at, little) => Number(view.getBigUint64(at, little)),
  b1: (view, at) => view.getUint8(at),
};

/** A type string such as `<f8`: byte order, kind, size in bytes (in characters for `U`). */
function typeOf(text: string, part: Part): { size: number; scalar: Scalar | null; what: string } {
  const match = /^([<>|=]?)([a-zA-Z])(\d*)(?:\[[^\]]*\])?$/.exec(text);
  if (!match) throw damaged(part, 'The array has a type that can’t be read.');
  const [, order, kind, digits] = match;
  if (kind === 'O') {
    const remedy = 'Write the array with a type of numbers, such as float64.';
    throw notRead(part, 'an array of Python objects', remedy);
  }
  const size = Number(digits || '0') * (kind === 'U' ? 4 : 1);
  if (size > 1_000_000) throw damaged(part, 'The array has a type of no sensible size.');
  const read = readers[`${kind}${digits}`];
  if (read)
    return { size, scalar: { size, read: (view, at) => read(view, at, order !== '>') }, what: 'numbers' };
  const words: Record<string, string> = {
    S: 'words',
    a: 'words',
    U: 'words',
    c: 'complex numbers',
    V: 'bytes',
  };
  const what =
    words[kind] ?? (kind === 'M' || kind === 'm' ? 'times' : kind === 'f' ? `${8 * size}-bit floats` : null);
  if (what === null) throw notRead(part, `an array of type ${kind}${digits}`);
  return { size, scalar: null, what };
}
