'use client';

import { useMemo, useState } from 'react';
import { CornerFigure, type CornerOverlay } from '@/components/figures/corner-figure';
import { WordButton } from '@/components/ui/word-button';
import { formatCount } from '@/lib/figures/format';
import { quantileMcse } from '@/lib/figures/mcse';
import type { Fit } from '@/lib/schemas';
import { keptColumn, type FigureDraws } from './draws';
import { isRunning } from './fit-words';
import { samplesOf } from './overlay';
import type { Quantity } from './quantities';
import { useDraws } from './use-fit';
import { OverlayDrop } from './overlay-drop';

/** Parameters shown at first. */
const atFirst = 5;

export interface CornerProps {
  fit: Fit;
  draws: FigureDraws;
  quantities: ReadonlyMap<string, Quantity>;
  number: number;
  /** Values that were put in, by name, where the data are simulated. */
  truth: Readonly<Record<string, number>> | null;
}

/** Quantities that vary, with their kept draws. */
function varying(quantities: ReadonlyMap<string, Quantity>, draws: FigureDraws) {
  return [...quantities.values()].flatMap((quantity) => {
    const values = keptColumn(draws, quantity.name);
    const varies = values.some((value) => value !== values[0]);
    return values.length && varies ? [{ quantity, values }] : [];
  });
}

/** The corner view of a fit, from some of its draws or, on demand, from all; other samples can be laid over it. */
export function Corner({ fit, draws: some, quantities, number, truth }: CornerProps) {
  const [wish, setWish] = useState<'some' | 'all'>('some');
  const all = useDraws(wish === 'all' ? fit : null, 'all');
  const draws = all ?? some;
  const [laid, setLaid] = useState<CornerOverlay | null>(null);
  const shown = useMemo(() => varying(quantities, draws), [quantities, draws]);
  const columns = useMemo(() => shown.map(({ values }) => values), [shown]);
  if (!shown.length) return null;
  const names = shown.map(({ quantity }) => quantity.name);
  const errorOf = (name: string) => {
    const found = fit.diagnostics.find(({ parameter }) => parameter === name);
    return found ? quantileMcse(0.5, found) || 0 : 0;
  };
  const sampled = shown.filter(({ quantity }) => !quantity.derived);
  const kept = shown[0].values.length;
  const made = fit.progress.draws * fit.replicas;
  return (
    <OverlayDrop
      what="samples (CSV)"
      laid={laid?.label ?? null}
      onTable={(table, label) => setLaid({ label, draws: samplesOf(table, names) })}
      onClear={() => setLaid(null)}
    >
      <CornerFigure
        number={number}
        label="Posterior densities and joint regions"
        fileName={`fit-${fit.number}-corner`}
        parameters={shown.map(({ quantity: { name, symbol, label, field } }) => ({
          name,
          symbol,
          label,
          field,
        }))}
        draws={columns}
        initial={sampled.slice(0, atFirst).map(({ quantity }) => quantity.name)}
        mcse={names.map(errorOf)}
        truth={truth ?? undefined}
        overlay={laid ?? undefined}
        aside={
          wish === 'some' && !isRunning(fit.status) && kept < made ? (
            <WordButton onClick={() => setWish('all')}>Draw all {formatCount(made)}</WordButton>
          ) : wish === 'all' && all === null ? (
            <span className="font-controls text-note text-ink-2">Reading all draws…</span>
          ) : null
        }
        caption={
          <>
            Posterior of fit {fit.number}, revision {fit.revision}, from {formatCount(kept)} of its{' '}
            {formatCount(made)} draws: contours enclose 68 and 95 % of them, as counted, with single draws
            outside; on the diagonal the median and the 68 % interval
            {truth ? '; dotted, what was put into the simulated data' : ''}.
          </>
        }
      />
    </OverlayDrop>
  );
}
