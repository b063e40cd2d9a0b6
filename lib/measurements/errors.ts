import { remedies, type FindingCode } from './codes';
import type { Finding, FindingLevel, Part } from './types';

/** Where in which upload something was found; all 1-based. */
export interface Place {
  part?: Part;
  line?: number;
  column?: number;
}

/** A file that cannot be read at all, or a step that cannot be taken: code, place and remedy. */
export class MeasurementError extends Error {
  readonly code: FindingCode;
  readonly remedy: string;
  readonly part?: Part;
  readonly line?: number;
  readonly column?: number;

  constructor(code: FindingCode, message: string, place: Place = {}, remedy: string = remedies[code]) {
    super(message);
    this.name = 'MeasurementError';
    this.code = code;
    this.remedy = remedy;
    if (place.part !== undefined) this.part = place.part;
    if (place.line !== undefined) this.line = place.line;
    if (place.column !== undefined) this.column = place.column;
  }

  /** The same as an entry of a list of findings, level error. */
  toFinding(): Finding {
    const { code, message, remedy, part, line, column } = this;
    return finding(code, 'error', message, { part, line, column }, remedy);
  }
}

/**
 * One finding with the remedy of its code, unless another one is given. Keys that have no value are left out,
 * so that findings compare and serialise plainly.
 */
export function finding(
  code: FindingCode,
  level: FindingLevel,
  message: string,
  place: Place = {},
  remedy: string = remedies[code],
): Finding {
  const result: Finding = { code, level, message };
  if (remedy !== '' && level !== 'ok') result.remedy = remedy;
  if (place.part !== undefined) result.part = place.part;
  if (place.line !== undefined) result.line = place.line;
  if (place.column !== undefined) result.column = place.column;
  return result;
}

/** How many findings of one kind are listed before they are only counted. */
export const LISTED = 20;

/**
 * Collects findings of one kind up to `LISTED`, and counts the rest: "and 41 more". Memory stays bounded
 * however broken the file is.
 */
export class FindingList {
  readonly #listed: Finding[] = [];
  #count = 0;

  /** The place is asked for only when the finding is listed. */
  add(make: () => Finding): void {
    if (this.#count < LISTED) this.#listed.push(make());
    this.#count += 1;
  }

  get count(): number {
    return this.#count;
  }

  /** What was listed, and if there was more, one finding of the same level, part and column that says how many. */
  toFindings(): Finding[] {
    const more = this.#count - this.#listed.length;
    if (more === 0) return this.#listed;
    const { level, code, part, column } = this.#listed[0];
    return [
      ...this.#listed,
      finding('more-findings', level, `And ${more} more of ${code}.`, { part, column }),
    ];
  }
}

/** A number for a message: four significant digits, `2.1 × 10^6` beyond a million, true minus, thin space for thousands. */
export function showNumber(value: number): string {
  if (!Number.isFinite(value)) return String(value);
  const magnitude = Math.abs(value);
  if (Number.isInteger(value) && magnitude < 1e6) return groupThousands(value);
  if (magnitude >= 1e6 || (magnitude < 1e-3 && magnitude > 0)) {
    const [mantissa, exponent] = value.toExponential(1).split('e');
    return `${mantissa} × 10^${Number(exponent)}`.replaceAll('-', '−');
  }
  return String(Number(value.toPrecision(4))).replace('-', '−');
}

function groupThousands(value: number): string {
  const digits = String(Math.abs(value)).replace(/\B(?=(\d{3})+$)/g, '\u202f');
  return value < 0 ? `−${digits}` : digits;
}

/** What a cell holds, for a message: control characters out, at most 24 characters. */
export function showCell(text: string): string {
  return `“${shorten(text, 24)}”`;
}

/** A column's name for a message: as `showCell`, without the quotes and at most 40 characters. */
export function showName(name: string): string {
  return shorten(name, 40);
}

function shorten(text: string, length: number): string {
  // Control and bidirectional characters of a hostile file must not reach a page or a log.
  const clean = text.slice(0, 4 * length).replace(/[\p{Cc}\p{Cf}\p{Zl}\p{Zp}\p{Cs}]/gu, '·');
  const points = Array.from(clean);
  return points.length > length ? `${points.slice(0, length - 1).join('')}…` : points.join('');
}
