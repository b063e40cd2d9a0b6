import { Sym } from '@/components/ui/sym';
import { DataTable, type Column } from '@/components/ui/table';
import { formatNumber, noValue } from '@/lib/figures/format';
import type { Fit, Mode } from '@/lib/schemas';

const shown = (value: number | null, decimals = 3): string =>
  value === null ? noValue : formatNumber(value, decimals);

/** The symbol of a mass parameter, mu1 or nu1. */
const symbolOf = (name: string): { base: string; sub: string } => ({
  base: name.startsWith('nu') ? 'ν' : 'μ',
  sub: name.slice(2),
});

function Places({ mode, names }: { mode: Mode; names: readonly string[] | null }) {
  return mode.mu.map((_, field) => (
    <span key={field} className="block whitespace-nowrap">
      <Sym {...symbolOf(names?.[field] ?? `mu${field + 1}`)} /> {shown(mode.lo[field], 2)} to{' '}
      {shown(mode.hi[field], 2)}
    </span>
  ));
}

/** The modes of the masses: their share of the draws beside that by the scan or by the independent run, in which no replica takes part. */
export function ModesTable({ fit }: { fit: Pick<Fit, 'modes' | 'modesOf'> }) {
  if (!fit.modes.length) return null;
  const names = fit.modesOf?.names ?? null;
  const byRun = fit.modesOf?.by === 'run';
  const source = byRun ? 'by the independent run' : 'by the scan';
  const comparison = byRun
    ? 'so the gate compares the draws with an independent run: sixteen chains of their own, started over the prior, that no replica takes part in; – where that run’s error is above 0.02.'
    : 'so the gate compares the draws with a scan of their own; – where the scan’s error is above 0.02.';
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
      head: source,
      numeric: true,
      phone: { area: '3 / 1 / 4 / 3', label: source },
    },
  ];
  return (
    <DataTable
      caption={`Modes of the masses. R-hat can’t see a mode that no replica visited, ${comparison}`}
      phoneColumns="minmax(0,1fr) auto"
      columns={columns}
      rows={fit.modes.map((mode) => ({
        key: `${mode.lo.join()} ${mode.hi.join()}`,
        cells: {
          place: <Places mode={mode} names={names} />,
          mean: mode.mu.map((mu) => shown(mu, 2)).join(', '),
          weight: shown(mode.weight),
          mcse: shown(mode.mcse),
          scan: shown(mode.scanWeight),
        },
      }))}
    />
  );
}
