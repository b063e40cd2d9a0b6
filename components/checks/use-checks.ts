'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import type { CheckListed, NotebookCheck, StartCheck } from '@/lib/schemas';
import { isPending } from './check-words';

/** Milliseconds between two looks at what is going on. */
const between = 1_000;

export interface ChecksHandle {
  checks: readonly CheckListed[];
  /** The check that is shown; null without any. */
  shown: CheckListed | null;
  /** It with what it found; null until it has ended, and while that is being read. */
  found: NotebookCheck | null;
  busy: 'starting' | 'stopping' | null;
  error: RequestError | null;
  start: (body: StartCheck) => Promise<void>;
  stop: () => Promise<void>;
  show: (id: string) => void;
}

/** The checks of a notebook: their list, one of them in full, starting and stopping. */
export function useChecks(notebookId: string, initial: readonly CheckListed[]): ChecksHandle {
  const [chosen, setChosen] = useState<string | null>(null);
  const [busy, setBusy] = useState<ChecksHandle['busy']>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const path = `/api/v1/notebooks/${notebookId}/checks`;
  const { data: checks = initial, mutate } = useSWR(path, read<readonly CheckListed[]>, {
    fallbackData: initial,
    revalidateOnMount: false,
    refreshInterval: (latest) => (latest?.some(isPending) ? between : 0),
  });
  const shown = checks.find(({ id }) => id === chosen) ?? checks.at(-1) ?? null;
  const { data: found } = useSWR(
    shown?.status === 'done' ? `/api/v1/checks/${shown.id}` : null,
    read<NotebookCheck>,
    { revalidateOnFocus: false },
  );

  async function act(what: NonNullable<ChecksHandle['busy']>, run: () => Promise<NotebookCheck>) {
    setError(null);
    setBusy(what);
    try {
      const { id } = await run();
      await mutate();
      setChosen(id);
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setBusy(null);
    }
  }

  return {
    checks,
    shown,
    found: found && found.id === shown?.id ? found : null,
    busy,
    error,
    start: (body) => act('starting', () => send<NotebookCheck>('POST', `${path}?wait=0`, body)),
    stop: () => act('stopping', () => send<NotebookCheck>('POST', `/api/v1/checks/${shown?.id}/stop`, {})),
    show: setChosen,
  };
}
