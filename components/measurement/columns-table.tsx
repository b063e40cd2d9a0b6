import { SelectField } from '@/components/ui/field';
import { StateWord } from '@/components/ui/state-word';
import { formatNumber, noValue } from '@/lib/figures/format';
import type { ColumnMapping, ColumnRole, Finding } from '@/lib/measurements';
import type { ColumnView, PreflightView } from './preflight-view';

/** What a column can mean, in the order of the choice. */
export const meanings: readonly { role: ColumnRole; label: string }[] = [
  { role: 'kappaLo', label: 'lower edge in κ' },
  { role: 'kappaHi', label: 'upper edge in κ' },
  { role: 'kappa', label: 'κ = k_long/k_short' },
  { role: 'kLong', label: 'k_long, the soft mode' },
  { role: 'kShort', label: 'k_short' },
  { role: 'k1', label: 'k1, a hard side' },
  { role: 'k2', label: 'k2, a hard side' },
  { role: 'k3', label: 'k3, the soft side' },
  { role: 'S', label: 'shape function S' },
  { role: 'B', label: 'bispectrum B of ζ' },
  { role: 'sigma', label: 'standard error of S or B' },
];

/** A cell's number as a file has it: plain in ordinary sizes, with an exponent else. */
export function cellNumber(value: number): string {
  if (!Number.isFinite(value)) return noValue;
  const size = Math.abs(value);
  if (size !== 0 && (size < 1e-2 || size >= 1e6)) return value.toExponential(3).replace(/-/g, '−');
  if (Number.isInteger(value)) return formatNumber(value, 0);
  return formatNumber(value, size >= 100 ? 1 : 3);
}

/** The mapping after one column's meaning has changed; a meaning belongs to one column at a time. */
export function remapped(
  columns: readonly ColumnView[],
  column: number,
  role: ColumnRole | null,
): ColumnMapping {
  const mapping: ColumnMapping = {};
  columns.forEach((view, j) => {
    const now = j === column ? role : view.role === role ? null : view.role;
    if (now) mapping[now] = j;
  });
  return mapping;
}

/**
 * The columns with the meanings that were chosen last: the checks that run on them in the background may still be about the
 * choice before, and a choice made meanwhile must not be lost.
 */
export function withMapping(columns: readonly ColumnView[], mapping: ColumnMapping | null): ColumnView[] {
  if (!mapping) return [...columns];
  const roles = new Map(Object.entries(mapping).map(([role, j]) => [Number(j), role as ColumnRole]));
  return columns.map((column, j) => ({ ...column, role: roles.get(j) ?? null }));
}

/** Errors of the mapping as a whole: they stand above the table, those of one column below its choice. */
const ofMapping: ReadonlySet<Finding['code']> = new Set([
  'missing-column',
  'ambiguous-column',
  'unknown-column',
  'column-used-twice',
  'kappa-given-twice',
  'shape-given-twice',
]);

const isError = ({ level, part }: Finding): boolean => level === 'error' && (part ?? 'file') === 'file';

/** What the power spectrum lacks is said beside its fields, where it is mended. */
export const ofSpectrum: ReadonlySet<Finding['code']> = new Set([
  'spectrum-missing',
  'spectrum-value',
  'unit-missing',
  'hubble-missing',
]);

/** "Line 33 and 2 more: …" of the errors in one column of the file. */
function faultOf(checks: readonly Finding[], column: number): string | undefined {
  const faults = checks.filter(
    (check) => isError(check) && check.column === column + 1 && !ofSpectrum.has(check.code),
  );
  if (faults.length === 0) return undefined;
  const [{ line, message }] = faults;
  const more = faults.length > 1 ? ` And ${faults.length - 1} more in this column.` : '';
  return `${line === undefined ? '' : `Line ${line}. `}${message}${more}`;
}

const gutter = 'sticky left-0 z-[1] bg-paper pr-2 text-left font-controls text-note text-ink-2';

function Head({ view, onMapping }: { view: PreflightView; onMapping: (mapping: ColumnMapping) => void }) {
  const { columns, checks, headerLine } = view;
  return (
    <thead>
      <tr>
        <th scope="row" className={`${gutter} border-t border-ink pt-[7px] align-top`}>
          Meaning
        </th>
        {columns.map((column, j) => (
          <td key={j} className="min-w-[126px] border-t border-ink pl-2 align-top">
            <SelectField
              hiddenLabel={`Meaning of column ${j + 1}, ${column.name}`}
              name={`meaning-${j}`}
              value={column.role ?? ''}
              error={faultOf(checks, j)}
              options={[
                { value: '', label: 'not used' },
                ...meanings.map(({ role, label }) => ({ value: role, label })),
              ]}
              onChange={(event) =>
                onMapping(remapped(columns, j, (event.target.value || null) as ColumnRole | null))
              }
            />
          </td>
        ))}
      </tr>
      <tr>
        <th scope="row" className={`${gutter} border-b border-rule pt-1 pb-1`}>
          {headerLine === null ? 'no header' : `line ${headerLine}`}
        </th>
        {columns.map((column, j) => (
          <th
            key={j}
            scope="col"
            className={`border-b border-rule py-1 pl-2 text-right font-numbers text-number font-normal ${column.role ? '' : 'text-ink-2'}`}
          >
            {column.name}
            {column.unit ? ` [${column.unit}]` : ''}
          </th>
        ))}
      </tr>
    </thead>
  );
}

/** The first rows of the file as they were read; what each column means is chosen above it. */
export function ColumnsTable({
  view: checked,
  mapping,
  onMapping,
}: {
  view: PreflightView;
  /** Set by hand; null where names were recognised. */
  mapping: ColumnMapping | null;
  onMapping: (mapping: ColumnMapping) => void;
}) {
  const view = { ...checked, columns: withMapping(checked.columns, mapping) };
  const { columns, checks, firstLines, rows } = view;
  const faults = checks.filter((check) => isError(check) && ofMapping.has(check.code));
  return (
    <>
      {/* As tall without a fault as with one: the table doesn't jump under the hand that chooses. */}
      <div role="status" className="min-h-[42px] max-w-figure text-small">
        {faults.map(({ code, message }) => (
          <p key={code} className="mb-0">
            <StateWord kind="bad">Error</StateWord> {message}
          </p>
        ))}
      </div>
      <div
        role="region"
        aria-label="First rows of the file"
        tabIndex={0}
        className="mt-1 mb-1 max-w-figure overflow-x-auto"
      >
        <table className="min-w-full border-separate border-spacing-0 text-small">
          <caption className="sr-only">
            The first rows of the file, with a choice of its meaning above each column
          </caption>
          <Head view={view} onMapping={onMapping} />
          <tbody>
            {firstLines.map((line, i) => (
              <tr key={line} className="group">
                <th
                  scope="row"
                  className={`${gutter} py-[3px] font-normal group-last:border-b group-last:border-ink`}
                >
                  line {line}
                </th>
                {columns.map((column, j) => (
                  <td
                    key={j}
                    className={`py-[3px] pl-2 text-right font-numbers text-number whitespace-nowrap group-last:border-b group-last:border-ink ${column.role ? '' : 'text-ink-2'}`}
                  >
                    {cellNumber(column.cells[i])}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <p className="text-note text-ink-2">
        {firstLines.length < rows ? `The first ${firstLines.length} of ${rows} rows` : `All ${rows} rows`}, in{' '}
        {columns.length} columns; a dash stands where a cell is no number.
      </p>
    </>
  );
}
