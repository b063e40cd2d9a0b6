import { finding } from '../errors';
import type { Finding, Part } from '../types';
import { damaged, leftOut, MAX_TABLE_COLUMNS, notRead, requireCells, type NumberTable } from './table';

/**
 * FITS (standard 4.0, Pence and others 2010, Astronomy and Astrophysics 524, A42): blocks of 2,880 bytes, header cards of 80
 * characters, numbers big-endian. Read are the first binary table with a column of single numbers, scaled by TSCAL and TZERO,
 * TNULL as not finite, TUNIT as unit; and for a matrix the first image of two axes, scaled by BSCALE and BZERO.
 */

const BLOCK = 2880;
const CARD = 80;
const MAX_UNITS = 1000;

type Header = Map<string, string | number | boolean>;

interface Unit {
  header: Header;
  /** Where its data begin and how long they are. */
  start: number;
  size: number;
}

export function isFits(bytes: Uint8Array): boolean {
  return String.fromCharCode(...bytes.subarray(0, 9)) === 'SIMPLE  =';
}

function integer(header: Header, name: string, part: Part, fallback?: number): number {
  const value = header.get(name) ?? fallback;
  if (typeof value !== 'number' || !Number.isSafeInteger(value)) {
    throw damaged(part, `The FITS header has no whole number for ${name}.`);
  }
  return value;
}

function text(header: Header, name: string): string {
  const value = header.get(name);
  return typeof value === 'string' ? value.trim() : '';
}

/** Cards up to END; numbers, logical values and strings by their form, comments left out. */
function readHeader(bytes: Uint8Array, at: number, part: Part): { header: Header; next: number } {
  const header: Header = new Map();
  for (let card = at; card + CARD <= bytes.length; card += CARD) {
    const line = String.fromCharCode(...bytes.subarray(card, card + CARD));
    const name = line.slice(0, 8).trimEnd();
    if (name === 'END') return { header, next: at + Math.ceil((card + CARD - at) / BLOCK) * BLOCK };
    if (line.slice(8, 10) !== '= ') continue;
    const value = /^\s*(?:'((?:[^']|'')*)'|([TF])(?=\s|\/|$)|([+-]?[\d.]+(?:[EeDd][+-]?\d+)?))/.exec(
      line.slice(10),
    );
    if (!value || header.has(name)) continue;
    if (value[1] !== undefined) header.set(name, value[1].replaceAll("''", "'"));
    else if (value[2] !== undefined) header.set(name, value[2] === 'T');
    else header.set(name, Number(value[3].replace(/[Dd]/, 'e')));
  }
  throw damaged(part, 'The FITS file ends within a header.');
}

/** All header and data units, as far as they are whole. */
function unitsOf(bytes: Uint8Array, part: Part): Unit[] {
  const units: Unit[] = [];
  let at = 0;
  while (at + CARD <= bytes.length && units.length < MAX_UNITS) {
    const known = String.fromCharCode(...bytes.subarray(at, at + 8));
    // What stands behind the last unit is no unit.
    if (units.length > 0 && known !== 'XTENSION') break;
    const { header, next } = readHeader(bytes, at, part);
    const axes = integer(header, 'NAXIS', part);
    if (axes < 0 || axes > 999) throw damaged(part, 'The FITS header has no sensible number of axes.');
    let count = axes === 0 ? 0 : 1;
    for (let k = 1; k <= axes; k += 1) count *= integer(header, `NAXIS${k}`, part);
    const groups = integer(header, 'GCOUNT', part, 1);
    const extra = integer(header, 'PCOUNT', part, 0);
    const size = (Math.abs(integer(header, 'BITPIX', part)) / 8) * groups * (extra + count);
    if (!Number.isSafeInteger(size) || size < 0) throw damaged(part, 'The FITS header has no sensible size.');
    if (next + size > bytes.length) {
      throw damaged(
        part,
        `The FITS file is cut off: ${next + size} bytes are announced, ${bytes.length} are there.`,
      );
    }
    units.push({ header, start: next, size });
    at = next + Math.ceil(size / BLOCK) * BLOCK;
  }
  return units;
}

interface TableColumn {
  name: string;
  unit: string;
  offset: number;
  letter: string;
  repeat: number;
  scale: number;
  zero: number;
  blank: number | null;
}

/** Bytes of one element by TFORM's letter; P and Q point into the heap. */
const SIZES: Record<string, number> = {
  L: 1,
  X: 0,
  B: 1,
  I: 2,
  J: 4,
  K: 8,
  A: 1,
  E: 4,
  D: 8,
  C: 8,
  M: 16,
  P: 8,
  Q: 16,
};

const readers: Record<string, (view: DataView, at: number) => number> = {
  B: (view, at) => view.getUint8(at),
  I: (view, at) => view.getInt16(at),
  J: (view, at) => view.getInt32(at),
  K: (view, at) => Number(view.getBigInt64(at)),
  E: (view, at) => view.getFloat32(at),
  D: (view, at) => view.getFloat64(at),
};

function columnsOf(header: Header, part: Part): TableColumn[] {
  const fields = integer(header, 'TFIELDS', part);
  if (fields < 0 || fields > MAX_TABLE_COLUMNS)
    throw damaged(part, 'The FITS table has no sensible number of columns.');
  let offset = 0;
  const columns: TableColumn[] = [];
  for (let k = 1; k <= fields; k += 1) {
    const form = /^(\d*)([A-Z])/.exec(text(header, `TFORM${k}`));
    if (!form || SIZES[form[2]] === undefined) {
      throw damaged(part, `The FITS table says no format of column ${k}.`);
    }
    const repeat = form[1] === '' ? 1 : Number(form[1]);
    const number = (name: string, fallback: number): number => {
      const value = header.get(`${name}${k}`);
      return typeof value === 'number' ? value : fallback;
    };
    const blank = header.get(`TNULL${k}`);
    columns.push({
      name: text(header, `TTYPE${k}`),
      unit: text(header, `TUNIT${k}`),
      offset,
      letter: form[2],
      repeat,
      scale: number('TSCAL', 1),
      zero: number('TZERO', 0),
      blank: typeof blank === 'number' ? blank : null,
    });
    offset += form[2] === 'X' ? Math.ceil(repeat / 8) : repeat * SIZES[form[2]];
  }
  if (offset !== integer(header, 'NAXIS1', part)) {
    throw damaged(part, 'The columns of the FITS table don’t fill its rows.');
  }
  return columns;
}

/** The first binary table with a column of single numbers. Throws MeasurementError where there is none. */
export function tableOfFits(bytes: Uint8Array, part: Part): NumberTable {
  const units = unitsOf(bytes, part);
  const tables = units.filter(({ header }) => text(header, 'XTENSION') === 'BINTABLE');
  for (const unit of tables) {
    const rows = integer(unit.header, 'NAXIS2', part);
    const width = integer(unit.header, 'NAXIS1', part);
    const all = columnsOf(unit.header, part);
    const numeric = all.filter(({ letter, repeat }) => readers[letter] !== undefined && repeat === 1);
    if (numeric.length === 0) continue;
    requireCells(part, rows, numeric.length);
    const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    const findings: Finding[] = all
      .filter((column) => !numeric.includes(column) && column.repeat > 0)
      .map(({ name, repeat }) => leftOut(part, name, repeat > 1 ? 'arrays or words' : 'no numbers'));
    if (tables.length > 1) {
      const named = text(unit.header, 'EXTNAME');
      const message = `The file has ${tables.length} tables; the first with numbers was read${named === '' ? '' : ` (${named})`}.`;
      findings.push(finding('several-tables', 'warning', message, { part }));
    }
    return {
      columns: numeric.map(({ name, unit: u }) => (u === '' ? { name } : { name, unit: u })),
      rows,
      data: numeric.map(({ letter, offset, scale, zero, blank }) => {
        const read = readers[letter];
        return Float64Array.from({ length: rows }, (_, row) => {
          const raw = read(view, unit.start + row * width + offset);
          return raw === blank && letter !== 'E' && letter !== 'D' ? NaN : raw * scale + zero;
        });
      }),
      findings,
    };
  }
  const remedy = 'Write the columns into a binary table (BINTABLE) with one number a cell.';
  throw notRead(part, 'a FITS file without a binary table of numbers', remedy);
}

/** For a matrix: the first image of two axes, else the numbers of the first table. */
export function matrixOfFits(bytes: Uint8Array, part: Part): NumberTable {
  const image = unitsOf(bytes, part).find(({ header }) => {
    const kind = text(header, 'XTENSION');
    return (kind === '' || kind === 'IMAGE') && header.get('NAXIS') === 2;
  });
  if (!image) return tableOfFits(bytes, part);
  const { header, start } = image;
  const [columns, rows] = [integer(header, 'NAXIS1', part), integer(header, 'NAXIS2', part)];
  const letter = { 8: 'B', 16: 'I', 32: 'J', 64: 'K', '-32': 'E', '-64': 'D' }[
    String(integer(header, 'BITPIX', part))
  ];
  if (letter === undefined) throw damaged(part, 'The FITS image has no type that can be read.');
  requireCells(part, rows, columns);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const size = SIZES[letter];
  const number = (name: string, fallback: number): number => {
    const value = header.get(name);
    return typeof value === 'number' ? value : fallback;
  };
  const [scale, zero] = [number('BSCALE', 1), number('BZERO', 0)];
  return {
    columns: Array.from({ length: columns }, () => ({ name: '' })),
    rows,
    data: Array.from({ length: columns }, (_, j) =>
      Float64Array.from(
        { length: rows },
        (__, i) => readers[letter](view, start + (i * columns + j) * size) * scale + zero,
      ),
    ),
    findings: [],
  };
}
