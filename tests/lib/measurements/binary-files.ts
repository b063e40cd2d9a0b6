import { gzipSync, zipSync } from 'fflate';

/** Binary files put together byte by byte from the formats' published descriptions, for tests. */

const latin = (text: string): Uint8Array => Uint8Array.from(text, (sign) => sign.charCodeAt(0));

export function join(...parts: Uint8Array[]): Uint8Array {
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

/** An NPY file with any header; `version` 1 or 2. */
export function npy(header: string, data: Uint8Array, version: 1 | 2 = 1): Uint8Array {
  const text = latin(`${header}\n`);
  const head = new Uint8Array(version === 1 ? 10 : 12);
  head.set(latin('\x93NUMPY'));
  head[6] = version;
  const view = new DataView(head.buffer);
  if (version === 1) view.setUint16(8, text.length, true);
  else view.setUint32(8, text.length, true);
  return join(head, text, data);
}

/** Numbers written one after the other. */
export function packed(
  size: number,
  values: readonly number[],
  write: (view: DataView, at: number, value: number) => void,
): Uint8Array {
  const bytes = new Uint8Array(size * values.length);
  const view = new DataView(bytes.buffer);
  values.forEach((value, i) => write(view, i * size, value));
  return bytes;
}

export const float64 = (values: readonly number[], little = true): Uint8Array =>
  packed(8, values, (view, at, value) => view.setFloat64(at, value, little));

/** A FITS header, padded to whole blocks. */
export function fitsHeader(cards: readonly string[]): Uint8Array {
  const text = [...cards, 'END'].map((card) => card.padEnd(80)).join('');
  return latin(text.padEnd(Math.ceil(text.length / 2880) * 2880));
}

export function fitsData(data: Uint8Array): Uint8Array {
  return join(data, new Uint8Array(Math.ceil(data.length / 2880) * 2880 - data.length));
}

export const primary = fitsHeader([
  'SIMPLE  =                    T',
  'BITPIX  =                    8',
  'NAXIS   =                    0',
]);

/** A binary table of some columns: TFORM and TTYPE, further cards, and the rows' bytes. */
export function fitsTable(
  columns: readonly { form: string; name: string }[],
  rowBytes: number,
  rows: Uint8Array,
  further: readonly string[] = [],
): Uint8Array {
  const card = (name: string, value: string | number): string =>
    `${name.padEnd(8)}= ${typeof value === 'number' ? String(value).padStart(20) : `'${value}'`}`;
  const header = fitsHeader([
    "XTENSION= 'BINTABLE'",
    card('BITPIX', 8),
    card('NAXIS', 2),
    card('NAXIS1', rowBytes),
    card('NAXIS2', rows.length / rowBytes),
    card('PCOUNT', 0),
    card('GCOUNT', 1),
    card('TFIELDS', columns.length),
    ...columns.flatMap(({ form, name }, k) => [card(`TTYPE${k + 1}`, name), card(`TFORM${k + 1}`, form)]),
    ...further,
  ]);
  return join(primary, header, fitsData(rows));
}

export const gzip = (bytes: Uint8Array): Uint8Array => gzipSync(bytes);
export const zip = (files: Record<string, Uint8Array>): Uint8Array => zipSync(files);
