import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { decimalsByMcse, formatCount, formatIntervals, formatNumber, noValue } from '@/lib/figures/format';
import type { Diagnostic, Fit } from '@/lib/schemas';
import { quantityOf, type Quantity } from './quantities';

/**
 * Monte Carlo standard error of a median, from that of the mean: √(π/2) times as much for a normal density; the digits
 * that are shown hang on its order alone.
 */
export const medianMcse = (mcseMean: number): number => Math.sqrt(Math.PI / 2) * mcseMean;

const ends = (lo: number | null, hi: number | null, decimals: number) => ({
  lo: lo ?? NaN,
  hi: hi ?? NaN,
  decimals,
});

const decimalsOf = ({ mcseMean }: Diagnostic) =>
  mcseMean === null ? 2 : Math.min(4, decimalsByMcse(medianMcse(mcseMean)));

/** Two figures of an error. */
function errorText(value: number | null): string {
  if (value === null) return noValue;
  if (value === 0) return '0';
  const decimals = Math.max(0, Math.min(6, 1 - Math.floor(Math.log10(value))));
  return formatNumber(value, decimals);
}

/** Median and equal-tailed intervals of every quantity, with the digits that the draws allow. */
export function MarginalTable({
  fit,
  quantities,
  number,
}: {
  fit: Fit;
  quantities: ReadonlyMap<string, Quantity>;
  number: number;
}) {
  const { diagnostics } = fit;
  const decimals = diagnostics.map(decimalsOf);
  const inner = formatIntervals(diagnostics.map(({ q16, q84 }, i) => ends(q16, q84, decimals[i])));
  const outer = formatIntervals(diagnostics.map(({ q2_5, q97_5 }, i) => ends(q2_5, q97_5, decimals[i])));
  return (
    <DataTable
      number={number}
      caption="Marginals with equal-tailed intervals; no digit is finer than twice its Monte Carlo error."
      columns={[
        { key: 'parameter', head: 'Parameter' },
        { key: 'median', head: 'median', numeric: true },
        { key: 'inner', head: '68 % interval', numeric: true, pre: true },
        { key: 'outer', head: '95 % interval', numeric: true, pre: true, phone: 'drop' },
        { key: 'mcse', head: 'MCSE', numeric: true, phone: 'drop' },
        { key: 'rhat', head: 'R-hat', numeric: true, phone: 'drop' },
        { key: 'bulk', head: 'ESS bulk', numeric: true, phone: 'drop' },
        { key: 'tail', head: 'ESS tail', numeric: true, phone: 'drop' },
      ]}
      rows={diagnostics.map((each, i) => {
        const quantity = quantityOf(quantities, each.parameter);
        const size = (value: number | null) => (value === null ? noValue : formatCount(Math.round(value)));
        return {
          key: each.parameter,
          cells: {
            parameter: (
              <span title={quantity.label} className="whitespace-nowrap">
                <Sym {...quantity.symbol} />
                {quantity.unit && quantity.unit !== 'rad' ? ` / ${quantity.unit}` : ''}
              </span>
            ),
            median: each.q50 === null ? noValue : formatNumber(each.q50, decimals[i]),
            inner: inner[i],
            outer: outer[i],
            mcse: errorText(each.mcseMean),
            rhat: each.rhat === null ? noValue : formatNumber(each.rhat, 3),
            bulk: size(each.essBulk),
            tail: size(each.essTail),
          },
        };
      })}
    />
  );
}
