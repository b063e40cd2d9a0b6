import { convertBispectrum, type ConvertedShape } from './bispectrum';
import { completeMapping, roleName } from './columns';
import { finding, FindingList, showCell, showNumber } from './errors';
import { median } from './mocks';
import type { FindingCode } from './codes';
import { wavenumberUnit } from './units';
import type {
  ColumnMapping,
  ColumnRole,
  Finding,
  FindingLevel,
  Measurement,
  MeasurementSummary,
  ParsedTable,
  PowerSpectrum,
} from './types';

/** Largest κ of a closed triangle: κ = 2k3/(k1+k2) ≤ 2. */
const KAPPA_LIMIT = 2;
/** Beyond this the triangle is not squeezed. */
const SQUEEZED = 0.5;
/** Edges written with few digits may overlap by this share of the narrower bin. */
const EDGE_TOLERANCE = 1e-3;
/** κ of two rows count as equal, and κ as inside its bin, within this relative difference. */
const KAPPA_TOLERANCE = 1e-9;

/** What applying a mapping gives. */
export interface AppliedMapping {
  /** Null where κ cannot be ordered (a κ that is no number or not positive). S and σ may hold NaN where a finding says so. */
  measurement: Measurement | null;
  findings: Finding[];
  /** What B was turned into S by; null where the file gives S. */
  conversion: Pick<ConvertedShape, 'factors' | 'spectrum'> | null;
}

/** Adds findings of each code up to a limit, so that one fault in every row is not ten thousand lines. */
class RowFindings {
  readonly #lists = new Map<FindingCode, FindingList>();

  add(
    code: FindingCode,
    level: FindingLevel,
    line: number,
    column: number | undefined,
    message: () => string,
  ): void {
    let list = this.#lists.get(code);
    if (!list) this.#lists.set(code, (list = new FindingList()));
    const place = { part: 'file' as const, line, ...(column === undefined ? {} : { column: column + 1 }) };
    list.add(() => finding(code, level, message(), place));
  }

  toFindings(): Finding[] {
    return [...this.#lists.values()].flatMap((list) => list.toFindings());
  }
}

/**
 * Takes the mapped columns as a measurement, rows in ascending κ, and checks them: κ and σ positive, edges in order and
 * without overlap, κ inside its bin, no κ twice, triangles closed, squeezed.
 *
 * κ is the κ column, else √(lo·hi), else k_long/k_short, else 2k3/(k1+k2). A bispectrum B becomes S by the power spectrum, and
 * without one there is no measurement. Throws MeasurementError where the
 * mapping names no such column or does not give S and κ.
 */
export function applyMapping(
  table: ParsedTable,
  mapping: ColumnMapping,
  spectrum: PowerSpectrum | null = null,
): AppliedMapping {
  const columns = completeMapping(table, mapping);
  const take = (role: ColumnRole) => (columns[role] === undefined ? null : table.data[columns[role]]);
  const [lo, hi] = [take('kappaLo'), take('kappaHi')];
  const fromB = columns.B === undefined ? null : convertBispectrum(table, columns, spectrum ?? {});
  const conversion = fromB?.converted ?? null;
  const S = fromB ? (conversion?.S ?? null) : take('S');
  const sigma = conversion ? conversion.sigma : take('sigma');
  const found = new RowFindings();
  findMissing(table, columns, found);
  const { kappa, column } = kappaOf(table, columns, found);
  const ordered = checkKappa(table, kappa, column, found);
  if (lo && hi) checkRowEdges(table, kappa, columns, lo, hi, found);
  if (sigma) {
    sigma.forEach((value, row) => {
      if (value <= 0)
        found.add(
          'sigma-not-positive',
          'error',
          table.lines[row],
          columns.sigma,
          () => 'The standard error is not above zero.',
        );
    });
  }
  const ofSpectrum = fromB?.findings ?? [];
  if (!ordered || !S) {
    return { measurement: null, findings: [...ofSpectrum, ...found.toFindings()], conversion };
  }

  const order = Int32Array.from(kappa, (_, row) => row).sort((a, b) => kappa[a] - kappa[b] || a - b);
  const permute = (values: Float64Array | null) =>
    values ? Float64Array.from(order, (row) => values[row]) : null;
  const measurement: Measurement = {
    kappa: Float64Array.from(order, (row) => kappa[row]),
    kappaLo: permute(lo),
    kappaHi: permute(hi),
    S: Float64Array.from(order, (row) => S[row]),
    sigma: permute(sigma),
    order,
  };
  checkNeighbours(
    table,
    measurement,
    column,
    columns.kappaLo === undefined && columns.kappa === undefined,
    found,
  );
  if (order.some((row, i) => row !== i)) {
    const line = table.lines[order.findIndex((row, i) => row !== i)];
    found.add(
      'rows-reordered',
      'note',
      line,
      undefined,
      () => 'The rows are not in ascending κ; they were sorted.',
    );
  }
  return { measurement, findings: [...ofSpectrum, ...found.toFindings()], conversion };
}

type Columns = Partial<Record<ColumnRole, number>>;

/** Cells without a finite number that reading has not listed: those of a column of words, and of rows that are short. */
function findMissing(table: ParsedTable, columns: Columns, found: RowFindings): void {
  const listed = new Set<string>();
  const counted = new Set<number>();
  for (const { line, column, code } of table.findings) {
    if (code === 'more-findings' && column !== undefined) counted.add(column);
    if (code === 'ragged-row') listed.add(`${line}`);
    if (column !== undefined && code !== 'text-column') listed.add(`${line}:${column}`);
  }
  for (const [role, column] of Object.entries(columns) as [ColumnRole, number][]) {
    if (counted.has(column + 1)) continue;
    table.data[column].forEach((value, row) => {
      const line = table.lines[row];
      if (Number.isFinite(value) || listed.has(`${line}`) || listed.has(`${line}:${column + 1}`)) return;
      found.add(
        'not-a-number',
        'error',
        line,
        column,
        () => `The value of ${roleName(role)} is not a number.`,
      );
    });
  }
}

function kappaOf(
  table: ParsedTable,
  columns: Columns,
  found: RowFindings,
): { kappa: Float64Array; column: number | undefined } {
  const pick = (role: ColumnRole) => (columns[role] === undefined ? null : table.data[columns[role]]);
  const [own, lo, hi, long, short] = [
    pick('kappa'),
    pick('kappaLo'),
    pick('kappaHi'),
    pick('kLong'),
    pick('kShort'),
  ];
  if (own) return { kappa: own.slice(), column: columns.kappa };
  if (lo && hi) return { kappa: lo.map((value, row) => Math.sqrt(value * hi[row])), column: columns.kappaLo };
  if (long && short) {
    checkPositive(table, columns, ['kLong', 'kShort'], found);
    const scale = scaleBetween(table, columns, 'kLong', 'kShort', found);
    return { kappa: long.map((value, row) => (value * scale) / short[row]), column: columns.kLong };
  }
  const [k1, k2, k3] = [pick('k1'), pick('k2'), pick('k3')];
  if (!k1 || !k2 || !k3) throw new Error('A complete mapping gives κ.');
  checkPositive(table, columns, ['k1', 'k2', 'k3'], found);
  for (const role of ['k1', 'k2'] as const) {
    if (scaleBetween(table, columns, role, 'k3', found) === 1) continue;
    const message = `${roleName(role)} and k3 are in different units.`;
    found.add('units-differ', 'error', table.headerLine ?? 1, columns[role], () => message);
  }
  k3.forEach((value, row) => {
    const slack = 1e-6 * (k1[row] + k2[row]);
    if (value > k1[row] + k2[row] + slack || value < Math.abs(k1[row] - k2[row]) - slack) {
      found.add(
        'not-a-triangle',
        'error',
        table.lines[row],
        columns.k3,
        () => 'k1, k2 and k3 do not close to a triangle.',
      );
    }
  });
  return { kappa: k3.map((value, row) => (2 * value) / (k1[row] + k2[row])), column: columns.k3 };
}

/** What turns a wavenumber of one column into the unit of another: 1 where units are the same or not said. */
function scaleBetween(
  table: ParsedTable,
  columns: Columns,
  role: ColumnRole,
  other: ColumnRole,
  found: RowFindings,
): number {
  const unitOf = (which: ColumnRole): string => {
    const column = columns[which];
    return (column === undefined ? undefined : table.columns[column].unit) ?? '';
  };
  const [from, to] = [unitOf(role), unitOf(other)];
  if (from === to || from === '' || to === '') return 1;
  const [a, b] = [wavenumberUnit(from), wavenumberUnit(to)];
  const said = `${roleName(role)} is in ${showCell(from)} and ${roleName(other)} in ${showCell(to)}`;
  const line = table.headerLine ?? 1;
  if (!a || !b || a.hubble !== b.hubble) {
    found.add('units-differ', 'error', line, columns[role], () => `${said}: κ can’t be taken from them.`);
    return 1;
  }
  if (a.perMpc !== b.perMpc) {
    found.add('units-converted', 'note', line, columns[role], () => `${said}; both were taken in one unit.`);
  }
  return a.perMpc / b.perMpc;
}

function checkPositive(table: ParsedTable, columns: Columns, roles: ColumnRole[], found: RowFindings): void {
  for (const role of roles) {
    const column = columns[role];
    if (column === undefined) continue;
    table.data[column].forEach((value, row) => {
      if (value <= 0)
        found.add(
          'kappa-not-positive',
          'error',
          table.lines[row],
          column,
          () => `${roleName(role)} is not above zero.`,
        );
    });
  }
}

/** κ finite, positive, possible, squeezed. True if the rows can be ordered by it. */
function checkKappa(
  table: ParsedTable,
  kappa: Float64Array,
  column: number | undefined,
  found: RowFindings,
): boolean {
  let ordered = true;
  let wide = 0;
  let widest = -1;
  kappa.forEach((value, row) => {
    const line = table.lines[row];
    if (!(value > 0 && value < Infinity)) {
      ordered = false;
      // κ that is no number has its finding by cell already.
      if (value <= 0) found.add('kappa-not-positive', 'error', line, column, () => 'κ is not above zero.');
    } else if (value >= KAPPA_LIMIT) {
      found.add(
        'kappa-too-large',
        'error',
        line,
        column,
        () => `κ is ${showNumber(value)}; no closed triangle has 2 or more.`,
      );
    } else if (value > SQUEEZED) {
      wide += 1;
      if (widest < 0 || value > kappa[widest]) widest = row;
    }
  });
  if (wide > 0) {
    const rows = wide === 1 ? 'One row has' : `${showNumber(wide)} rows have`;
    const message = `${rows} κ above ${SQUEEZED}, where triangles are not squeezed; the largest is ${showNumber(kappa[widest])}.`;
    found.add('not-squeezed', 'warning', table.lines[widest], column, () => message);
  }
  return ordered;
}

function checkRowEdges(
  table: ParsedTable,
  kappa: Float64Array,
  columns: Columns,
  lo: Float64Array,
  hi: Float64Array,
  found: RowFindings,
): void {
  lo.forEach((low, row) => {
    const high = hi[row];
    const line = table.lines[row];
    if (low <= 0)
      found.add(
        'kappa-not-positive',
        'error',
        line,
        columns.kappaLo,
        () => 'The lower edge is not above zero.',
      );
    if (high <= low) {
      const message = () =>
        `The upper edge, ${showNumber(high)}, is not above the lower one, ${showNumber(low)}.`;
      found.add('edges-reversed', 'error', line, columns.kappaHi, message);
    } else if (high > KAPPA_LIMIT * (1 + KAPPA_TOLERANCE)) {
      found.add(
        'kappa-too-large',
        'error',
        line,
        columns.kappaHi,
        () => `The upper edge is ${showNumber(high)}; no closed triangle has more than 2.`,
      );
    } else if (kappa[row] < low * (1 - 1e-6) || kappa[row] > high * (1 + 1e-6)) {
      found.add(
        'kappa-outside-bin',
        'error',
        line,
        columns.kappa,
        () => `κ, ${showNumber(kappa[row])}, lies outside its bin.`,
      );
    }
  });
}

/** What only shows between neighbours in κ: overlap, gaps, the same κ twice. */
function checkNeighbours(
  table: ParsedTable,
  { kappa, kappaLo, kappaHi, order }: Measurement,
  column: number | undefined,
  fromTriangles: boolean,
  found: RowFindings,
): void {
  let gaps = 0;
  let firstGap = 0;
  for (let i = 1; i < kappa.length; i += 1) {
    const line = table.lines[order[i]];
    const before = table.lines[order[i - 1]];
    if (kappa[i] - kappa[i - 1] <= KAPPA_TOLERANCE * kappa[i]) {
      // Triangles of different size may share κ; bins may not.
      const level = fromTriangles ? 'warning' : 'error';
      found.add('duplicate-kappa', level, line, column, () => `κ is the same as on line ${before}.`);
    } else if (kappaLo && kappaHi) {
      const narrower = Math.min(kappaHi[i] - kappaLo[i], kappaHi[i - 1] - kappaLo[i - 1]);
      const step = kappaLo[i] - kappaHi[i - 1];
      // A reversed bin has its own finding.
      if (narrower <= 0) continue;
      if (step < -EDGE_TOLERANCE * narrower) {
        found.add(
          'bins-overlap',
          'error',
          line,
          undefined,
          () => `The bin overlaps the one on line ${before}.`,
        );
      } else if (step > EDGE_TOLERANCE * narrower) {
        gaps += 1;
        if (firstGap === 0) firstGap = line;
      }
    }
  }
  if (gaps > 0) {
    const message =
      gaps === 1 ? 'There is one gap between bins.' : `There are ${showNumber(gaps)} gaps between bins.`;
    found.add('bin-gaps', 'note', firstGap, undefined, () => message);
  }
}

/** Range, edges, resolution 2π/L and Nyquist mass π/Δ, L = ln(κmax/κmin), Δ the median spacing in ln κ. */
export function summarise({ kappa, kappaLo, kappaHi }: Measurement): MeasurementSummary {
  const rows = kappa.length;
  const kappaMin = kappaLo ? kappaLo.reduce((a, b) => Math.min(a, b), Infinity) : kappa[0];
  const kappaMax = kappaHi ? kappaHi.reduce((a, b) => Math.max(a, b), 0) : kappa[rows - 1];
  const centre = (i: number) => (kappaLo && kappaHi ? Math.sqrt(kappaLo[i] * kappaHi[i]) : kappa[i]);
  const spacings = Float64Array.from({ length: rows - 1 }, (_, i) =>
    Math.log(centre(i + 1) / centre(i)),
  ).sort();
  const spacing = median(spacings);
  return {
    rows,
    kappaMin,
    kappaMax,
    hasBinEdges: kappaLo !== null,
    resolution: rows > 1 ? (2 * Math.PI) / Math.log(kappaMax / kappaMin) : Infinity,
    nyquist: rows > 1 && spacing > 0 ? Math.PI / spacing : Infinity,
  };
}
