import { Sym } from '@/components/ui/sym';
import { DataTable, type Column } from '@/components/ui/table';
import { decimalsByMcse, formatCount, formatIntervals, formatNumber, noValue } from '@/lib/figures/format';
import { quantileMcse, weakness } from '@/lib/figures/mcse';
import type { Diagnostic, Fit } from '@/lib/schemas';
import { quantityOf, type Quantity } from './quantities';

/** Most decimals of a table, however small the error. */
const mostDecimals = 4;

const decimalsOf = (error: number): number => Math.min(mostDecimals, decimalsByMcse(error));

/** Decimals of the median and of the ends of both intervals: each by its own Monte Carlo error. */
export function marginalDecimals(each: Diagnostic): { median: number; inner: number; outer: number } {
  const [median, inner, outer] = ([0.5, 0.16, 0.025] as const).map((tail) =>
    decimalsOf(quantileMcse(tail, each)),
  );
  return { median, inner, outer };
}

/** Two figures of an error. */
function errorText(value: number | null): string {
  if (value === null) return noValue;
  if (value === 0) return '0';
  const decimals = Math.max(0, Math.min(6, 1 - Math.floor(Math.log10(value))));
  return formatNumber(value, decimals);
}

/** How far the median lies from what was put in, in standard deviations of the marginal. */
function distanceText({ q50, sd }: Diagnostic, truth: number): string {
  if (q50 === null || sd === null || sd === 0) return noValue;
  const away = (q50 - truth) / sd;
  return `${away > 0 ? '+' : ''}${formatNumber(away, 1)} sd`;
}

export interface MarginalTableProps {
  fit: Fit;
  quantities: ReadonlyMap<string, Quantity>;
  number: number;
  /** Values that were put in, by name, where the data are simulated. */
  truth?: Readonly<Record<string, number>> | null;
}

/** Median and equal-tailed intervals of every quantity, with the digits that the draws allow. */
export function MarginalTable({ fit, quantities, number, truth }: MarginalTableProps) {
  const { diagnostics } = fit;
  const rows = diagnostics.map((each) => ({
    each,
    quantity: quantityOf(quantities, each.parameter),
    decimals: marginalDecimals(each),
    weak: weakness(each),
    truth: truth?.[each.parameter],
  }));
  const told = rows.filter(({ weak }) => weak === null);
  const column = (lo: 'q16' | 'q2_5', hi: 'q84' | 'q97_5', of: 'inner' | 'outer') =>
    formatIntervals(
      told.map(({ each, decimals }) => ({
        lo: each[lo] ?? NaN,
        hi: each[hi] ?? NaN,
        decimals: decimals[of],
      })),
    );
  const inner = column('q16', 'q84', 'inner');
  const outer = column('q2_5', 'q97_5', 'outer');
  const withTruth = told.some((row) => row.truth !== undefined);
  const columns: (Column | null)[] = [
    { key: 'parameter', head: 'Parameter' },
    { key: 'median', head: 'median', numeric: true },
    withTruth ? { key: 'truth', head: 'put in', numeric: true } : null,
    withTruth ? { key: 'away', head: 'away', numeric: true, phone: 'drop' } : null,
    { key: 'inner', head: '68 % interval', numeric: true, pre: true },
    { key: 'outer', head: '95 % interval', numeric: true, pre: true, phone: 'drop' },
    { key: 'mcse', head: 'MCSE', numeric: true, phone: 'drop' },
    { key: 'rhat', head: 'R-hat', numeric: true, phone: 'drop' },
    { key: 'bulk', head: 'ESS bulk', numeric: true, phone: 'drop' },
    { key: 'tail', head: 'ESS tail', numeric: true, phone: 'drop' },
  ];
  const size = (value: number | null) => (value === null ? noValue : formatCount(Math.round(value)));
  const weak = rows.filter((row) => row.weak !== null);
  return (
    <>
      <DataTable
        number={number}
        caption={`Marginals with equal-tailed intervals; no digit is finer than twice its Monte Carlo error.${withTruth ? ' Beside the median what was put into the simulated data, and how far away it lies.' : ''}`}
        columns={columns.filter((each) => each !== null)}
        rows={rows.map((row) => {
          const { each, quantity, decimals, truth: put } = row;
          const at = told.indexOf(row);
          return {
            key: each.parameter,
            cells: {
              parameter: (
                <span title={quantity.label} className="whitespace-nowrap">
                  <Sym {...quantity.symbol} />
                  {quantity.unit && quantity.unit !== 'rad' ? ` / ${quantity.unit}` : ''}
                </span>
              ),
              median: at < 0 ? 'no value' : formatNumber(each.q50 ?? NaN, decimals.median),
              truth: put === undefined ? '' : String(put).replace('-', '−'),
              away: put === undefined || at < 0 ? '' : distanceText(each, put),
              inner: at < 0 ? noValue : inner[at],
              outer: at < 0 ? noValue : outer[at],
              mcse: errorText(each.mcseMean),
              rhat: each.rhat === null ? noValue : formatNumber(each.rhat, 3),
              bulk: size(each.essBulk),
              tail: size(each.essTail),
            },
          };
        })}
      />
      {weak.length ? (
        <ul className="mt-1 list-none p-0 text-small text-ink-2">
          {weak.map(({ each, quantity, weak: why }) => (
            <li key={each.parameter}>
              <Sym {...quantity.symbol} />: no value, because {why}.
            </li>
          ))}
        </ul>
      ) : null}
    </>
  );
}
