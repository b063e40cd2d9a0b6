'use client';

import { useEffect, useEffectEvent, useState } from 'react';
import type { FitEvent } from '@/lib/schemas';
import { isRunning } from './fit-words';

/** State of the stream; `lost` says when, and when it is tried again, `trouble` what keeps the server from reading the fit. */
export type Connection =
  | { kind: 'off' }
  | { kind: 'live' }
  | { kind: 'trouble'; at: string; message: string }
  | { kind: 'lost'; at: string; secondsLeft: number; retry: () => void };

/** Seconds before the n-th new try. */
const waits = [1, 2, 4, 8, 15, 30];

/** Live figures are drawn anew once a second at most; five with reduced motion. */
function pace(): number {
  return window.matchMedia('(prefers-reduced-motion: reduce)').matches ? 5_000 : 1_000;
}

/** Hands on the newest value at most once in `pace` milliseconds, and the last one always. */
function paced<T>(give: (value: T) => void) {
  let newest: T | undefined;
  let last = 0;
  let timer: number | undefined;
  const flush = () => {
    timer = undefined;
    if (newest === undefined) return;
    last = Date.now();
    give(newest);
    newest = undefined;
  };
  return {
    take(value: T, now: boolean) {
      newest = value;
      window.clearTimeout(timer);
      if (now) flush();
      else timer = window.setTimeout(flush, Math.max(0, last + pace() - Date.now()));
    },
    stop: () => window.clearTimeout(timer),
  };
}

/**
 * Follows a fit by server-sent events. Each event is the whole changing state, so that nothing is missed by a lost
 * connection; it is opened again after a growing wait, which is told.
 */
export function useFitEvents(id: string | null, onEvent: (event: FitEvent) => void): Connection {
  const [connection, setConnection] = useState<Connection>({ kind: 'off' });
  const given = useEffectEvent(onEvent);

  useEffect(() => {
    if (!id) return;
    let source: EventSource | null = null;
    let tries = 0;
    let ticking: number | undefined;
    const pacer = paced<FitEvent>((event) => given(event));

    const open = () => {
      window.clearInterval(ticking);
      source?.close();
      source = new EventSource(`/api/v1/fits/${id}/events`);
      source.addEventListener('fit', ({ data }: MessageEvent<string>) => {
        tries = 0;
        const event = JSON.parse(data) as FitEvent;
        const ended = !isRunning(event.status);
        setConnection(ended ? { kind: 'off' } : { kind: 'live' });
        pacer.take(event, ended);
        if (ended) source?.close();
      });
      source.addEventListener('trouble', ({ data }: MessageEvent<string>) => {
        const { message } = JSON.parse(data) as { message: string };
        setConnection({ kind: 'trouble', at: new Date().toISOString(), message });
      });
      source.addEventListener('error', lose);
    };

    const lose = () => {
      source?.close();
      source = null;
      const at = new Date().toISOString();
      let secondsLeft = waits[Math.min(tries, waits.length - 1)];
      tries += 1;
      const tell = () => setConnection({ kind: 'lost', at, secondsLeft, retry: open });
      // A stream that comes back at once is no news.
      if (tries > 1) tell();
      window.clearInterval(ticking);
      ticking = window.setInterval(() => {
        secondsLeft -= 1;
        if (secondsLeft <= 0) open();
        else if (tries > 1) tell();
      }, 1_000);
    };

    open();
    return () => {
      window.clearInterval(ticking);
      pacer.stop();
      source?.close();
    };
  }, [id]);

  return id ? connection : { kind: 'off' };
}
