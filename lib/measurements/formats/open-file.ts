import { finding, MeasurementError } from '../errors';
import { decodeText, refuseOtherFormats, requireSize } from '../text';
import type { Part } from '../types';
import { gunzip, isGzip, isZip, unzipArrays } from './archives';
import { isEcsv, readEcsvHeader, type EcsvHeader } from './ecsv';
import { isFits, matrixOfFits, tableOfFits } from './fits';
import { isNpy, openNpy, tableOfNpy } from './npy';
import type { NumberTable } from './table';

/** A file that was looked into: numbers already, or text that is still to be read. */
export type OpenedFile =
  { kind: 'numbers'; table: NumberTable } | { kind: 'text'; bytes: Uint8Array; ecsv: EcsvHeader | null };

/** Which of the arrays in an archive a matrix is. */
const MATRIX_NAMES: Record<Exclude<Part, 'file'>, RegExp> = {
  covariance: /^(c|cov|covariance|covariance_?matrix)$/i,
  window: /^(w|window|window_?matrix)$/i,
  columns: /^columns$/i,
  theoryCovariance: /^(t|theory_?cov(ariance)?)$/i,
  mocks: /^(mocks?|realisations|realizations|samples)$/i,
};

/**
 * Tells by its first bytes what a file is: gzip (unpacked once), NPY, NPZ, FITS, ECSV or other text. Formats that aren't read
 * are refused by name. Memory is bounded by `maxBytes`, whatever the file says of itself. Throws MeasurementError.
 */
export function openFile(bytes: Uint8Array, fileName: string, part: Part, maxBytes: number): OpenedFile {
  requireSize(bytes, part, maxBytes);
  if (isGzip(bytes)) {
    const inner = gunzip(bytes, part, maxBytes);
    return openPlain(inner, fileName.replace(/\.gz$/i, ''), part, maxBytes);
  }
  return openPlain(bytes, fileName, part, maxBytes);
}

function openPlain(bytes: Uint8Array, fileName: string, part: Part, maxBytes: number): OpenedFile {
  if (isNpy(bytes)) return { kind: 'numbers', table: withTrailing(bytes, part) };
  if (isFits(bytes)) {
    return { kind: 'numbers', table: part === 'file' ? tableOfFits(bytes, part) : matrixOfFits(bytes, part) };
  }
  if (isZip(bytes) && (/\.npz$/i.test(fileName) || namesArrays(bytes))) {
    return { kind: 'numbers', table: tableOfArrays(unzipArrays(bytes, part, maxBytes), part) };
  }
  refuseOtherFormats(bytes, fileName, part);
  const start = decodeText(bytes.subarray(0, 64)).text;
  if (!isEcsv(start)) return { kind: 'text', bytes, ecsv: null };
  return { kind: 'text', bytes, ecsv: readEcsvHeader(decodeText(bytes.subarray(0, 2 ** 20)).text, part) };
}

function namesArrays(bytes: Uint8Array): boolean {
  return /\.npy/.test(String.fromCharCode(...bytes.subarray(0, 4096)));
}

function withTrailing(bytes: Uint8Array, part: Part): NumberTable {
  const array = openNpy(bytes, part);
  const table = tableOfNpy(array, part);
  if (array.trailing === 0) return table;
  const message = `${array.trailing} bytes behind the array were left out.`;
  return { ...table, findings: [...table.findings, finding('trailing-bytes', 'warning', message, { part })] };
}

/**
 * The table in an archive of arrays. Columns: all arrays of one axis and equal length, by name; else the only array of two axes or
 * of records. A matrix: the only array of two axes, or the one that is called so.
 */
function tableOfArrays(arrays: Map<string, Uint8Array>, part: Part): NumberTable {
  if (arrays.size === 0) {
    throw new MeasurementError('no-rows', 'The archive holds no arrays.', { part });
  }
  const opened = [...arrays].map(([name, bytes]) => ({ name, array: openNpy(bytes, part) }));
  const tables = opened.filter(({ array }) => array.shape.length === 2 || array.named);
  const vectors = opened.filter(({ array }) => array.shape.length === 1 && !array.named);
  const wanted = part === 'file' ? null : MATRIX_NAMES[part];
  const named = wanted ? tables.filter(({ name }) => wanted.test(name)) : [];
  const chosen = named.length === 1 ? named : tables;
  const first = vectors[0]?.array.shape[0];
  const equal = vectors.length > 1 && vectors.every(({ array }) => array.shape[0] === first);
  if (part === 'file' && equal && chosen.length === 0) {
    const read = vectors.map(({ name, array }) => ({ name, table: tableOfNpy(array, part) }));
    return {
      columns: read.map(({ name }) => ({ name })),
      rows: first,
      data: read.map(({ table }) => table.data[0]),
      findings: read.flatMap(({ table }) => table.findings),
    };
  }
  if (chosen.length === 1) return tableOfNpy(chosen[0].array, part);
  const names = opened.map(({ name }) => name).slice(0, 12);
  const message = `The archive holds ${opened.length} arrays (${names.join(', ')}), and none stands out as the table.`;
  throw new MeasurementError('several-tables', message, { part });
}
