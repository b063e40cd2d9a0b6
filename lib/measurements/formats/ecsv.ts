import { parse } from 'yaml';
import type { Part } from '../types';
import { damaged, notRead } from './table';

/**
 * ECSV 1.0 (Enhanced Character Separated Values, astropy's APE 6, its public description): comment lines whose text behind
 * `# ` is YAML, with `datatype` (name, unit, datatype of each column) and `delimiter` (space or comma), then one line of names and
 * the rows. The YAML is read as plain data: no tags are resolved and no aliases followed.
 */
export interface EcsvHeader {
  columns: { name: string; unit?: string }[];
  delimiter: ' ' | ',';
}

/** Longest header, characters. */
const MAX_HEADER = 256 * 1024;

export function isEcsv(start: string): boolean {
  return /^\uFEFF?\s*#\s*%ECSV\s/.test(start);
}

/** Reads the header of an ECSV table. Throws MeasurementError `damaged-file` or `format-not-read`. */
export function readEcsvHeader(text: string, part: Part): EcsvHeader {
  const lines: string[] = [];
  let length = 0;
  let at = text.charCodeAt(0) === 0xfeff ? 1 : 0;
  while (at < text.length) {
    const feed = text.indexOf('\n', at);
    const end = feed < 0 ? text.length : feed;
    const line = text.slice(at, end).replace(/\r$/, '');
    if (!/^\s*#/.test(line)) break;
    length += line.length;
    if (length > MAX_HEADER) throw damaged(part, 'The header of the ECSV table is longer than 256 kB.');
    lines.push(line.replace(/^\s*# ?/, ''));
    at = end + 1;
  }
  const version = /^%ECSV\s+(\d+)/.exec(lines[0] ?? '');
  if (version?.[1] !== '0' && version?.[1] !== '1') {
    throw notRead(part, `an ECSV table of version ${(version?.[1] ?? 'unknown').slice(0, 8)}`);
  }
  const yaml = lines.slice(1).filter((line) => line.trim() !== '---');
  let header: unknown;
  try {
    header = parse(yaml.join('\n'), { maxAliasCount: 0, logLevel: 'silent', prettyErrors: false });
  } catch {
    throw damaged(part, 'The header of the ECSV table is no YAML that can be read.');
  }
  if (
    typeof header !== 'object' ||
    header === null ||
    !('datatype' in header) ||
    !Array.isArray(header.datatype)
  ) {
    throw damaged(part, 'The header of the ECSV table lists no columns under datatype.');
  }
  const columns = header.datatype.map((entry: unknown, j) => {
    if (typeof entry !== 'object' || entry === null || !('name' in entry) || typeof entry.name !== 'string') {
      throw damaged(part, `Column ${j + 1} of the ECSV header has no name.`);
    }
    const unit = 'unit' in entry && typeof entry.unit === 'string' ? entry.unit.trim() : '';
    return unit === '' ? { name: entry.name } : { name: entry.name, unit };
  });
  const delimiter = 'delimiter' in header ? header.delimiter : ' ';
  if (delimiter !== ' ' && delimiter !== ',') {
    throw damaged(part, 'The delimiter of an ECSV table is a space or a comma.');
  }
  return { columns, delimiter };
}
