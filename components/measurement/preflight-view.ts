import type { FilePart } from '@/lib/schemas';
import type {
  ColumnMapping,
  ColumnRole,
  Finding,
  MeasurementSummary,
  ParsedTable,
  PreflightResult,
} from '@/lib/measurements';

/** One column of the file as the table of columns shows it. */
export interface ColumnView {
  name: string;
  unit: string | null;
  role: ColumnRole | null;
  /** Its first rows as they were read; NaN where a cell is no number. */
  cells: number[];
}

/** What the page shows of a preflight: plain data that may come from a worker. */
export interface PreflightView {
  ok: boolean;
  rows: number;
  columns: ColumnView[];
  /** Lines in the file of the rows that are shown, and of its head, if it has one. */
  firstLines: number[];
  headerLine: number | null;
  checks: Finding[];
  summary: MeasurementSummary | null;
  points: {
    kappa: number[];
    lo: number[] | null;
    hi: number[] | null;
    S: number[];
    sigma: number[];
    /** Line in the file of each point, in ascending κ. */
    lines: number[];
  } | null;
  covarianceSource: 'file' | 'mocks' | 'errors' | null;
  mockCount: number | null;
  /** Milliseconds that reading and checking took. */
  took: number;
}

/** So many rows of the file stand in the table of columns. */
const rowsShown = 6;

function columnViews(table: ParsedTable, mapping: ColumnMapping): ColumnView[] {
  const roles = new Map(
    Object.entries(mapping).map(([role, column]) => [Number(column), role as ColumnRole] as const),
  );
  return table.columns.map(({ name, unit }, j) => ({
    name,
    unit: unit ?? null,
    role: roles.get(j) ?? null,
    cells: [...table.data[j].subarray(0, rowsShown)],
  }));
}

/** √ of the covariance's diagonal where there is a covariance, else the file's own errors. */
function errorsOf(result: PreflightResult): number[] | null {
  if (!result.measurement) return null;
  const { measurement } = result;
  const p = measurement.kappa.length;
  if (result.ok) return Array.from({ length: p }, (_, i) => Math.sqrt(result.covariance[i * p + i]));
  return measurement.sigma ? [...measurement.sigma] : new Array<number>(p).fill(NaN);
}

/** Cuts a preflight's result down to what the page shows. `shown` names the columns by the mapping that was tried. */
export function viewOf(result: PreflightResult, shown: ColumnMapping, took: number): PreflightView {
  const { table, measurement, checks, summary } = result;
  const sigma = errorsOf(result);
  return {
    ok: result.ok,
    rows: table?.rows ?? 0,
    columns: table ? columnViews(table, shown) : [],
    firstLines: table ? [...table.lines.subarray(0, rowsShown)] : [],
    headerLine: table?.headerLine ?? null,
    checks,
    summary,
    points:
      table && measurement && sigma
        ? {
            kappa: [...measurement.kappa],
            lo: measurement.kappaLo && [...measurement.kappaLo],
            hi: measurement.kappaHi && [...measurement.kappaHi],
            S: [...measurement.S],
            sigma,
            lines: Array.from(measurement.order, (row) => table.lines[row]),
          }
        : null,
    covarianceSource: result.ok ? result.covarianceSource : null,
    mockCount: result.ok ? result.mockCount : null,
    took,
  };
}

const counts = (checks: readonly Finding[], level: Finding['level']): number =>
  checks.filter((check) => check.level === level).length;

export interface LevelCounts {
  errors: number;
  warnings: number;
  notes: number;
  passed: number;
}

export function levelCounts(checks: readonly Finding[]): LevelCounts {
  return {
    errors: counts(checks, 'error'),
    warnings: counts(checks, 'warning'),
    notes: counts(checks, 'note'),
    passed: counts(checks, 'ok'),
  };
}

/** Share of the axis that a word beside a mark takes. */
const wordRoom = 0.2;

/** Leaves out the words that would run into the one before. */
function spaced(marks: { kappa: number; word: string }[], kappa: readonly number[]) {
  const span = Math.log(kappa[kappa.length - 1] / kappa[0]) || 1;
  let last = -Infinity;
  return marks.map((mark) => {
    const at = Math.log(mark.kappa / kappa[0]) / span;
    if (at - last < wordRoom) return { ...mark, word: '' };
    last = at;
    return mark;
  });
}

/** Points to frame, places without a point and the lines of those, from the findings that name a line. */
export function marksOf(view: PreflightView) {
  const { points, checks } = view;
  if (!points) return { flags: [], gaps: [], missing: [] };
  const indexOf = (line: number | undefined) => (line === undefined ? -1 : points.lines.indexOf(line));
  const flags = checks.flatMap((check) => {
    const index = check.code === 'suspicious-point' ? indexOf(check.line) : -1;
    return index < 0 ? [] : [{ index, word: `line ${check.line}` }];
  });
  const missing = points.S.flatMap((value, index) => (Number.isFinite(value) ? [] : [index]));
  const gaps = spaced(
    missing.map((index) => ({ kappa: points.kappa[index], word: `line ${points.lines[index]}: no number` })),
    points.kappa,
  );
  return { flags, gaps, missing: missing.map((index) => points.lines[index]).sort((a, b) => a - b) };
}

/** Which upload a file is, by its name; the reader may say otherwise. */
export function partByName(name: string): FilePart {
  const plain = name.toLowerCase();
  if (/mock|sims?\b|simulations|realisations|realizations/.test(plain)) return 'mocks';
  if (/theor.*cov|cov.*theor/.test(plain)) return 'theoryCovariance';
  if (/cov/.test(plain)) return 'covariance';
  if (/window|mixing.?matrix|wmat/.test(plain)) return 'window';
  if (/columns?\b|templates?\b|systematics|gravit/.test(plain)) return 'columns';
  return 'file';
}
