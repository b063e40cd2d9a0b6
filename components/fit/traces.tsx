'use client';

import { useMemo } from 'react';
import { TraceFigure } from '@/components/figures/trace-figure';
import { capital, inWords, listed } from '@/components/words/counts';
import { formatCount } from '@/lib/figures/format';
import type { Fit } from '@/lib/schemas';
import { byReplica, type FigureDraws } from './draws';
import type { Quantity } from './quantities';

/** What traces are drawn of: the masses; without any, the first two parameters. */
export function tracedQuantities(quantities: ReadonlyMap<string, Quantity>, draws: FigureDraws): Quantity[] {
  const sampled = [...quantities.values()].filter(({ name, derived }) => !derived && draws.columns[name]);
  const masses = sampled.filter(({ role }) => role === 'mass');
  return masses.length ? masses : sampled.slice(0, 2);
}

export function Traces({
  fit,
  draws,
  quantities,
  number,
}: {
  fit: Fit;
  draws: FigureDraws;
  quantities: ReadonlyMap<string, Quantity>;
  number: number;
}) {
  const traced = useMemo(() => tracedQuantities(quantities, draws), [quantities, draws]);
  const traces = useMemo(
    () => traced.map(({ name, symbol, field }) => ({ symbol, field, replicas: byReplica(draws, name) })),
    [traced, draws],
  );
  if (!traced.length) return null;
  const { warmup, warmupTotal } = fit.progress;
  // The draws are read less often than the fit's state: the sentence is of those that are drawn.
  const last = Array.from(draws.draw).reduce((most, draw) => Math.max(most, draw), 0);
  const kept = Math.max(0, Math.min(fit.progress.draws, last + draws.stride - warmupTotal));
  const what =
    traced[0].role === 'mass'
      ? traced.length === 1
        ? 'the mass'
        : `the ${inWords(traced.length)} masses`
      : listed(traced.map(({ label }) => label));
  return (
    <TraceFigure
      number={number}
      label={`Traces of ${what} in every replica`}
      fileName={`fit-${fit.number}-traces`}
      traces={traces}
      warmup={Math.min(warmup, warmupTotal)}
      step={draws.stride}
      caption={`${capital(what)} in the ${inWords(draws.replicas)} replicas of fit ${fit.number} since the start: ${formatCount(warmup)} draws of warm-up, shaded, and ${formatCount(kept)} kept${draws.stride > 1 ? `; one draw in ${formatCount(draws.stride)} is drawn` : ''}.`}
    />
  );
}
