'use client';

import { useState } from 'react';
import { ConvergenceSpark } from '@/components/figures/convergence-spark';
import { StateWord } from '@/components/ui/state-word';
import { Sym, symbolName } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { capital, inWords } from '@/components/words/counts';
import { formatCount, formatNumber, noValue } from '@/lib/figures/format';
import type { Fit } from '@/lib/schemas';
import { meetsGate, quantityOf, type Quantity } from './quantities';

const number = (value: number | null, decimals: number) =>
  value === null ? noValue : decimals === 0 ? formatCount(Math.round(value)) : formatNumber(value, decimals);

/** R-hat and effective sample sizes of every quantity, with how they came about. */
export function ConvergenceTable({
  fit,
  quantities,
}: {
  fit: Fit;
  quantities: ReadonlyMap<string, Quantity>;
}) {
  const [all, setAll] = useState(false);
  const { diagnostics, history, gate, progress } = fit;
  const derived = diagnostics.filter((each) => each.derived).length;
  const draws = history.map((entry) => entry.draws);
  const total = Math.max(1, progress.draws);
  const shown = diagnostics.map((each, i) => ({ each, i })).filter(({ each }) => all || !each.derived);
  return (
    <>
      <DataTable
        ruled
        number={1}
        caption={`Convergence of fit ${fit.number} after ${formatCount(progress.draws)} draws a replica; dashed, the gate.`}
        phoneColumns="44px 132px minmax(0,1fr)"
        columns={[
          { key: 'quantity', head: 'Quantity', middle: true, phone: { area: '1 / 1' } },
          { key: 'rhatLine', head: 'R-hat against draws', middle: true, phone: { area: '1 / 2' } },
          {
            key: 'rhat',
            head: 'R-hat',
            numeric: true,
            middle: true,
            phone: { area: '1 / 3', label: 'R-hat' },
          },
          { key: 'essLine', head: 'ESS against draws', middle: true, phone: { area: '2 / 2' } },
          { key: 'bulk', head: 'bulk', numeric: true, middle: true, phone: { area: '2 / 3', label: 'bulk' } },
          { key: 'tail', head: 'tail', numeric: true, middle: true, phone: { area: '3 / 3', label: 'tail' } },
          { key: 'gate', head: 'Gate', middle: true, phone: { area: '3 / 2' } },
        ]}
        rows={shown.map(({ each, i }) => {
          const quantity = quantityOf(quantities, each.parameter);
          const met = meetsGate(each, gate.target);
          const name = symbolName(quantity.symbol);
          return {
            key: each.parameter,
            cells: {
              quantity: (
                <span title={quantity.label} className="font-words text-[17px]/[28px]">
                  <Sym {...quantity.symbol} />
                </span>
              ),
              rhatLine: (
                <ConvergenceSpark
                  draws={draws}
                  values={history.map(({ rhat }) => rhat[i] ?? NaN)}
                  threshold={gate.target.rhat}
                  scale="rhat"
                  total={total}
                  label={`R-hat of ${name} against draws`}
                />
              ),
              rhat: number(each.rhat, 3),
              essLine: (
                <ConvergenceSpark
                  draws={draws}
                  values={history.map(({ ess }) => ess[i] ?? NaN)}
                  threshold={gate.target.ess}
                  scale="ess"
                  total={total}
                  label={`Effective sample size of ${name} against draws`}
                />
              ),
              bulk: number(each.essBulk, 0),
              tail: number(each.essTail, 0),
              gate: <StateWord kind={met ? 'ok' : 'wait'}>{met ? 'met' : 'not yet'}</StateWord>,
            },
          };
        })}
      />
      {derived ? (
        <p className="text-small">
          <button
            type="button"
            aria-expanded={all}
            className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
            onClick={() => setAll(!all)}
          >
            {all
              ? 'Fold the derived quantities'
              : `${capital(inWords(derived))} derived ${derived === 1 ? 'quantity' : 'quantities'}`}
          </button>
        </p>
      ) : null}
    </>
  );
}
