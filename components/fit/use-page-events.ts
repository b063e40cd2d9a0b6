'use client';

import { useEffect, useEffectEvent, useState } from 'react';
import { asRequestError, read } from '@/components/api/request';
import { isRunning } from './fit-words';
import type { FitEvent, Notebook, Presence } from '@/lib/schemas';

/**
 * State of the stream; `away` says what doesn't answer, since when, and when it is tried again (null: the server follows it
 * by itself), `gone` that the notebook isn't there for this person.
 */
export type Connection = { kind: 'off' } | { kind: 'live' } | Away | { kind: 'gone' };

export interface Away {
  kind: 'away';
  what: 'server' | 'database';
  at: string;
  secondsLeft: number | null;
  retry: () => void;
}

/** Seconds before the n-th new try. */
const waits = [1, 2, 4, 8, 15, 30];

/** A page that nobody looks at lets its stream go after so long: a browser holds only a few to one server. */
const hiddenFor = 60_000;

/** The server says every 15 s that it is there; a stream that is silent for so long is dead, whatever the network says. */
const silentFor = 40_000;

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

export interface PageEvents {
  onNotebook: (notebook: Notebook) => void;
  onFit: (event: FitEvent) => void;
}

export interface PageStream {
  connection: Connection;
  /** Addresses of those who have the notebook open as well, as far as the stream has told. */
  others: readonly string[];
}

const parse = <T>({ data }: MessageEvent<string>): T => JSON.parse(data) as T;

/**
 * Follows a notebook, and the fit that its page shows while that runs, over one stream of server-sent events. Each event is a
 * whole state, so that nothing is missed by a lost connection; it is opened again after a growing wait, which is told.
 */
export function usePageEvents(notebookId: string, fitId: string | null, events: PageEvents): PageStream {
  const [connection, setConnection] = useState<Connection>({ kind: 'off' });
  const [others, setOthers] = useState<readonly string[]>([]);
  const onNotebook = useEffectEvent(events.onNotebook);
  const onFit = useEffectEvent(events.onFit);

  useEffect(() => {
    const notebookPath = `/api/v1/notebooks/${notebookId}`;
    const path = `${notebookPath}/events${fitId ? `?fit=${fitId}` : ''}`;
    let source: EventSource | null = null;
    let tries = 0;
    let since: string | null = null;
    let what: Away['what'] = 'server';
    let asked: AbortController | undefined;
    let ticking: number | undefined;
    let hiding: number | undefined;
    let silence: number | undefined;
    const pacer = paced<FitEvent>((event) => onFit(event));

    const close = () => {
      window.clearInterval(ticking);
      window.clearTimeout(silence);
      asked?.abort();
      source?.close();
      source = null;
    };
    const hear = () => {
      window.clearTimeout(silence);
      silence = window.setTimeout(() => {
        tries = Math.max(tries, 1);
        lose();
      }, silentFor);
    };
    const live = () => {
      tries = 0;
      since = null;
      what = 'server';
      setConnection({ kind: 'live' });
    };
    const open = () => {
      close();
      source = new EventSource(path);
      hear();
      const on = <T>(name: string, take: (value: T) => void) =>
        source?.addEventListener(name, (event: MessageEvent<string>) => {
          hear();
          take(parse<T>(event));
        });
      on<unknown>('beat', () => undefined);
      on<Notebook>('notebook', (notebook) => {
        live();
        onNotebook(notebook);
      });
      on<Presence>('presence', (present) => setOthers(present.others));
      on<FitEvent>('fit', (event) => {
        live();
        pacer.take(event, !isRunning(event.status));
      });
      on<unknown>('trouble', () => {
        since ??= new Date().toISOString();
        what = 'database';
        setConnection({ kind: 'away', what, at: since, secondsLeft: null, retry: open });
      });
      source.addEventListener('error', lose);
    };

    const lose = () => {
      close();
      setOthers([]);
      const at = (since ??= new Date().toISOString());
      let secondsLeft = waits[Math.min(tries, waits.length - 1)];
      tries += 1;
      const tell = () => setConnection({ kind: 'away', what, at, secondsLeft, retry: open });
      // A stream that comes back at once is no news; what else is said depends on what a plain question is answered.
      if (tries > 1) {
        const { signal } = (asked = new AbortController());
        void read(notebookPath, signal)
          .catch((error: unknown) => {
            const { status, code } = asRequestError(error);
            if (signal.aborted) return;
            what = code === 'unavailable' ? 'database' : 'server';
            if (status !== 404) return;
            close();
            setConnection({ kind: 'gone' });
          })
          .then(() => signal.aborted || tell());
      }
      ticking = window.setInterval(() => {
        secondsLeft -= 1;
        if (tries > 1) tell();
        if (secondsLeft <= 0) open();
      }, 1_000);
    };

    const onVisibility = () => {
      window.clearTimeout(hiding);
      if (document.hidden) hiding = window.setTimeout(close, hiddenFor);
      else if (!source) open();
    };

    open();
    document.addEventListener('visibilitychange', onVisibility);
    return () => {
      document.removeEventListener('visibilitychange', onVisibility);
      window.clearTimeout(hiding);
      pacer.stop();
      close();
    };
  }, [notebookId, fitId]);

  return { connection, others };
}
