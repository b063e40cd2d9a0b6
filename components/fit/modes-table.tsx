import { Sym } from '@/components/ui/sym';
import { DataTable, type Column } from '@/components/ui/table';
import { formatNumber, noValue } from '@/lib/figures/format';
import type { Fit, Mode } from '@/lib/schemas';

const shown = (value: number | null, decimals = 3): string =>
  value === null ? noValue : formatNumber(value, decimals);

function Places({ mode }: { mode: Mode }) {
  return mode.mu.map((_, field) => (
    <span key={field} className="block whitespace-nowrap">
      <Sym base="μ" sub={String(field + 1)} /> {shown(mode.lo[field], 2)} to {shown(mode.hi[field], 2)}
    </span>
  ));
}

/** The modes of the masses: their share of the draws beside that by the scan, which no chain takes part in. */
export function ModesTable({ fit }: { fit: Pick<Fit, 'modes'> }) {
  if (!fit.modes.length) return null;
  const columns: Column[] = [
    { key: 'place', head: 'Mode', phone: { area: '1 / 1' } },
    { key: 'mean', head: 'mean', numeric: true, phone: { area: '1 / 2', label: 'mean' } },
    {
      key: 'weight',
      head: 'share of draws',
      numeric: true,
      phone: { area: '2 / 1 / 3 / 3', label: 'share of draws' },
    },
    { key: 'mcse', head: 'MCSE', numeric: true, phone: 'drop' },
    {
      key: 'scan',
      head: 'by the scan',
      numeric: true,
      phone: { area: '3 / 1 / 4 / 3', label: 'by the scan' },
    },
  ];
  return (
    <DataTable
      caption="Modes of the masses. R-hat can’t see a mode that no replica visited, so the gate compares the draws with a scan of their own; – where the scan’s error is above 0.02."
      phoneColumns="minmax(0,1fr) auto"
      columns={columns}
      rows={fit.modes.map((mode) => ({
        key: `${mode.lo.join()} ${mode.hi.join()}`,
        cells: {
          place: <Places mode={mode} />,
          mean: mode.mu.map((mu) => shown(mu, 2)).join(', '),
          weight: shown(mode.weight),
          mcse: shown(mode.mcse),
          scan: shown(mode.scanWeight),
        },
      }))}
    />
  );
}
