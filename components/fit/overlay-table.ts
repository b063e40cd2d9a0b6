import { parseMeasurement, type ParsedTable } from '@/lib/measurements';

const mark = '%ECSV';

/**
 * Reads any delimited text with named columns. The header of an ECSV file is taken for comments: below it stand the same
 * lines as in a CSV file, and the numbers of lines stay.
 *
 * Throws MeasurementError where no table can be made of the bytes.
 */
export function tableOf(bytes: Uint8Array, name: string): ParsedTable {
  const start = new TextDecoder('latin1').decode(bytes.subarray(0, 16));
  const at = start.indexOf(mark);
  if (at < 0 || !start.startsWith('#')) return parseMeasurement(bytes, name);
  const plain = bytes.slice();
  plain.fill(0x20, at, at + mark.length);
  return parseMeasurement(plain, name);
}
