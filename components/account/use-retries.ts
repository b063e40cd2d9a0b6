'use client';

import { usePathname } from 'next/navigation';
import { useEffect, useEffectEvent, useRef, useState } from 'react';
import { asRequestError, read } from '@/components/api/request';
import type { Health } from '@/lib/schemas';

/** Seconds before the n-th try to draw a page again; where it is known what is away, it is asked for at least so often. */
const waits = [2, 4, 8, 15, 30, 60];
const waitForService = 8;

/** Tries so far, by address: a page that fails anew after one is another page to React, and waits longer. */
const tried = new Map<string, number>();

/** What keeps a page from being drawn; `unknown` where all that it needs answers. */
export type Cause = 'server' | 'database' | 'unknown';

async function causeNow(): Promise<Cause> {
  try {
    const health = await read<Health>('/api/v1/health');
    return health.database === 'away' ? 'database' : 'unknown';
  } catch (error) {
    return asRequestError(error).status === 0 ? 'server' : 'unknown';
  }
}

export interface Retries {
  cause: Cause;
  /** Until the next try; null while one is under way. */
  secondsLeft: number | null;
  retryNow: () => void;
}

/**
 * Draws a page again by itself, after waits that grow: as soon as what was away answers, or, where nothing is away,
 * because the fault may have passed. The page is asked for only where a server answers, so that this one is never lost to a
 * blank one.
 */
export function useRetries(retry: () => void): Retries {
  const path = usePathname();
  const [state, setState] = useState<{ cause: Cause; secondsLeft: number | null }>({
    cause: 'unknown',
    secondsLeft: null,
  });
  const drawAgain = useEffectEvent(retry);
  const now = useRef<() => void>(() => undefined);

  useEffect(() => {
    let gone = false;
    let asking = false;
    let left = 0;
    let known: Cause = 'unknown';
    const look = async (draw: boolean) => {
      if (asking) return;
      asking = true;
      left = 0;
      setState({ cause: known, secondsLeft: null });
      const cause = await causeNow();
      asking = false;
      if (gone) return;
      const tries = cause === known ? (tried.get(path) ?? 0) : 0;
      tried.set(path, draw ? tries + 1 : tries);
      known = cause;
      left = waits[Math.min(tries, waits.length - 1)];
      if (cause !== 'unknown') left = Math.min(left, waitForService);
      setState({ cause, secondsLeft: left });
      if (draw && cause === 'unknown') drawAgain();
    };
    now.current = () => void look(true);
    // What is at fault is said at once; the first try comes after the first wait.
    void look(false);
    const ticking = window.setInterval(() => {
      if (left === 0) return;
      left -= 1;
      if (left === 0) void look(true);
      else setState({ cause: known, secondsLeft: left });
    }, 1_000);
    return () => {
      gone = true;
      window.clearInterval(ticking);
    };
  }, [path]);

  return { ...state, retryNow: () => now.current() };
}
