'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import { fitState, isRunning } from '@/components/fit/fit-words';
import { quantitiesOf, quantityOf } from '@/components/fit/quantities';
import { Subheading } from '@/components/ui/section';
import { SheetRow } from '@/components/ui/sheet';
import { StateWord } from '@/components/ui/state-word';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { decimalsByMcse, formatInterval, formatNumber, minus } from '@/lib/figures/format';
import type { Marginal, Notebook, Shift, Shifts as ShiftsAnswer } from '@/lib/schemas';

type Pair = ShiftsAnswer['pairs'][number];

const decimalsOf = ({ mcse }: Marginal): number => (mcse === null ? 2 : Math.min(4, decimalsByMcse(mcse)));

function Value({ of, why }: { of: Marginal | null; why: string }) {
  if (!of) return <span className="font-controls text-note text-ink-2">{why}</span>;
  const decimals = decimalsOf(of);
  return (
    <>
      {formatNumber(of.median, decimals)}
      <span className="block text-ink-2">{formatInterval(of.lo68, of.hi68, decimals)}</span>
    </>
  );
}

function shiftText({ shift, shiftMcse }: Shift): string | null {
  if (shift === null) return null;
  const decimals = shiftMcse === null ? 1 : Math.max(0, Math.min(2, decimalsByMcse(shiftMcse)));
  const text = formatNumber(shift, decimals);
  return text.startsWith(minus) || Number(text) === 0 ? text : `+${text}`;
}

function PairTable({ pair }: { pair: Pair }) {
  const quantities = quantitiesOf(pair.template);
  const state = fitState(pair.new.status);
  const why = isRunning(pair.new.status) ? 'no value yet' : 'no value';
  return (
    <>
      <p className="mb-0">
        Fit {pair.new.number}, on version {pair.new.version}, repeats fit {pair.old.number}, on version{' '}
        {pair.old.version}: <StateWord kind={state.kind}>{state.word}</StateWord>
      </p>
      <DataTable
        ruled
        label={`Shifts from fit ${pair.old.number} to fit ${pair.new.number}`}
        columns={[
          { key: 'parameter', head: 'Parameter' },
          { key: 'old', head: `fit ${pair.old.number}, version ${pair.old.version}`, numeric: true },
          { key: 'new', head: `fit ${pair.new.number}, version ${pair.new.version}`, numeric: true },
          { key: 'shift', head: 'shift', numeric: true },
        ]}
        rows={pair.shifts.map((each) => {
          const quantity = quantityOf(quantities, each.parameter);
          return {
            key: each.parameter,
            cells: {
              parameter: (
                <span title={quantity.label} className="whitespace-nowrap">
                  <Sym {...quantity.symbol} />
                </span>
              ),
              old: <Value of={each.old} why="no value" />,
              new: <Value of={each.new} why={why} />,
              shift: shiftText(each) ?? <span className="font-controls text-note text-ink-2">{why}</span>,
            },
          };
        })}
      />
    </>
  );
}

/** Milliseconds between two looks while a repetition runs. */
const between = 3_000;

/** How the results moved with the version of the measurement; nothing where no fit repeats another. */
export function Shifts({ notebook }: { notebook: Notebook }) {
  const { data } = useSWR(
    [`/api/v1/notebooks/${notebook.id}/shifts`, notebook.revision],
    ([path]) => read<ShiftsAnswer>(path),
    {
      keepPreviousData: true,
      refreshInterval: (known) => (known?.pairs.some((pair) => isRunning(pair.new.status)) ? between : 0),
    },
  );
  if (!data?.pairs.length) return null;
  return (
    <SheetRow id="shifts">
      <section aria-labelledby="shifts-title" className="border-t border-hairline pt-[13px] pb-6">
        <Subheading id="shifts-title">How the results moved with the version</Subheading>
        <p className="text-small text-ink-2">
          Median and 68 % interval of each quantity. The shift is the difference of the medians in units of
          their combined standard deviation, √(sd² + sd²), with no digit finer than twice its Monte Carlo
          error. The versions share most of their data, so it is a distance and no significance.
        </p>
        {data.pairs.map((pair) => (
          <PairTable key={pair.new.id} pair={pair} />
        ))}
      </section>
    </SheetRow>
  );
}
