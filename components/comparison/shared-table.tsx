import { quantitiesOf, quantityOf } from '@/components/fit/quantities';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { decimalsByMcse, formatInterval, formatNumber, minus, noValue } from '@/lib/figures/format';
import { shiftOf } from '@/lib/figures/shift';
import type { ComparedFit } from '@/lib/schemas';

type Marginal = ComparedFit['marginals'][number];

const decimalsOf = ({ mcse }: Marginal): number =>
  mcse === null ? 2 : Math.max(0, Math.min(4, decimalsByMcse(mcse)));

function shiftText(first: Marginal, here: Marginal): string {
  const moved = shiftOf(first, here);
  if (!moved) return noValue;
  const decimals = moved.mcse === null ? 1 : Math.max(0, Math.min(2, decimalsByMcse(moved.mcse)));
  const text = formatNumber(moved.shift, decimals);
  return text.startsWith(minus) || Number(text) === 0 ? text : `+${text}`;
}

/** Parameters that at least two of the fits have: their medians, 68 % intervals, and how far each lies from the first. */
export function SharedTable({ fits }: { fits: readonly ComparedFit[] }) {
  const names = [...new Set(fits.flatMap(({ marginals }) => marginals.map(({ parameter }) => parameter)))];
  const shared = names.flatMap((name) => {
    const found = fits.flatMap((fit) => {
      const marginal = fit.marginals.find(({ parameter }) => parameter === name);
      return marginal ? [{ fit, marginal }] : [];
    });
    return found.length > 1 ? [{ name, found }] : [];
  });
  if (!shared.length) return null;
  return (
    <DataTable
      label="Parameters that the fits share"
      caption="Parameters that the fits share: median and 68 % interval, and the difference of the medians from the first row’s in units of √(sd² + sd²). Fields are told apart by their masses, so that μ₁ is the lightest of as many as the fit has."
      columns={[
        { key: 'parameter', head: 'Parameter' },
        { key: 'fit', head: 'fit', numeric: true },
        { key: 'median', head: 'median', numeric: true },
        { key: 'interval', head: '68 % interval', numeric: true },
        { key: 'shift', head: 'shift', numeric: true },
      ]}
      rows={shared.flatMap(({ name, found }) =>
        found.map(({ fit, marginal }, i) => {
          const quantity = quantityOf(quantitiesOf(fit.template), name);
          const decimals = decimalsOf(marginal);
          return {
            key: `${name} ${fit.id}`,
            cells: {
              parameter: (
                <span title={quantity.label} className={i === 0 ? 'whitespace-nowrap' : 'sr-only'}>
                  <Sym {...quantity.symbol} />
                </span>
              ),
              fit: String(fit.number),
              median: formatNumber(marginal.median, decimals),
              interval: formatInterval(marginal.lo68, marginal.hi68, decimals),
              shift: i === 0 ? '' : shiftText(found[0].marginal, marginal),
            },
          };
        }),
      )}
    />
  );
}
