'use client';

import { useState } from 'react';
import useSWR, { useSWRConfig } from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import type { Scan, StartScan, Trials } from '@/lib/schemas';
import { isPending } from './scan-words';

/** Milliseconds between two looks at what is going on. */
const between = 700;

export interface ScanHandle {
  trials: Trials;
  /** Id of the scan that is shown; null without any. */
  shown: string | null;
  /** That scan; null while it is being read. */
  scan: Scan | null;
  starting: boolean;
  error: RequestError | null;
  start: (body: StartScan) => Promise<void>;
  show: (id: string) => void;
}

/**
 * The scans of a notebook: the log, one of them in full, and starting another. The answer to a start comes when the scan has
 * ended; meanwhile the log tells of it, and its progress is read.
 */
export function useScans(notebookId: string, initial: Trials): ScanHandle {
  const [chosen, setChosen] = useState<string | null>(null);
  const [starting, setStarting] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const { mutate: put } = useSWRConfig();
  const { data: trials = initial, mutate } = useSWR(`/api/v1/notebooks/${notebookId}/trials`, read<Trials>, {
    fallbackData: initial,
    revalidateOnMount: false,
    refreshInterval: (latest) => (starting || latest?.trials.some(isPending) ? between : 0),
  });
  const shown = chosen ?? trials.trials.at(-1)?.scan ?? null;
  const { data: scan } = useSWR(shown ? `/api/v1/scans/${shown}` : null, read<Scan>, {
    refreshInterval: (latest) => (latest && isPending(latest) ? between : 0),
    revalidateOnFocus: false,
  });

  async function start(body: StartScan) {
    setError(null);
    setStarting(true);
    setChosen(null);
    try {
      const answer = await send<Scan>('POST', `/api/v1/notebooks/${notebookId}/scan`, body);
      await put(`/api/v1/scans/${answer.id}`, answer, { revalidate: false });
      await mutate();
      setChosen(answer.id);
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setStarting(false);
    }
  }

  return {
    trials,
    shown,
    scan: scan && scan.id === shown ? scan : null,
    starting,
    error,
    start,
    show: setChosen,
  };
}
