'use client';

import useSWR from 'swr';
import { read, readBytes } from '@/components/api/request';
import type { Fit, FitEvent } from '@/lib/schemas';
import { unpackDraws, type FigureDraws } from './draws';
import { isRunning } from './fit-words';

export interface FitHandle {
  fit: Fit | null;
  /** Puts in place what a stop, resume or extend answered. */
  put: (fit: Fit) => void;
  /** Puts in place what the page's stream told of it. */
  take: (event: FitEvent) => void;
}

/** A fit by its id; the page's stream keeps it live while it runs. */
export function useFit(id: string | null, initial: Fit | null): FitHandle {
  const { data, mutate } = useSWR(id ? `/api/v1/fits/${id}` : null, read<Fit>, {
    fallbackData: initial?.id === id ? (initial ?? undefined) : undefined,
    revalidateOnFocus: false,
  });
  const fit = data && data.id === id ? data : null;
  return {
    fit,
    put: (next) => void mutate(next, { revalidate: false }),
    // What came with the page isn't in the cache: there is nothing before an event until the first read is in. And every mutation
    // discards a read that is under way, so that one which kept nothing would leave the page without either.
    take: (event) => {
      if (fit) void mutate((before) => ({ ...(before ?? fit), ...event }), { revalidate: false });
    },
  };
}

/**
 * Draws that are fetched for figures: fewer while they still change. Eight thousand are as many as a fit at the gate has
 * effective ones; the corner view takes all on demand.
 */
const most = { running: 4_000, ended: 8_000, all: 200_000 };
const between = 5_000;

/**
 * Draws of a fit for figures; while it runs they are read again every five seconds.
 *
 * @param wish 'all' for every stored draw of an ended fit, up to 200,000
 */
export function useDraws(fit: Fit | null, wish: 'some' | 'all' = 'some'): FigureDraws | null {
  const running = fit !== null && isRunning(fit.status);
  const some = fit !== null && fit.progress.warmup + fit.progress.draws > 0;
  const max = running ? most.running : wish === 'all' ? most.all : most.ended;
  // The count of draws is part of the key of an ended fit: one that was extended is read again.
  const made = running ? 'running' : (fit?.progress.draws ?? 0);
  const { data } = useSWR(
    some && fit ? [`/api/v1/fits/${fit.id}/draws?max=${max}&format=float32`, made] : null,
    async ([path]) => unpackDraws(await readBytes(path)),
    { refreshInterval: running ? between : 0, revalidateOnFocus: false, keepPreviousData: true },
  );
  return some ? (data ?? null) : null;
}
