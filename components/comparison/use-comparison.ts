'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import type { Comparison, Notebook } from '@/lib/schemas';
import { anyRunning } from './comparison-words';

/** Milliseconds between two looks while one of the fits runs. */
const between = 2_000;

/** The notebook's fits side by side; read anew when the notebook or the state of one of its fits changes, and while one runs. */
export function useComparison(notebook: Notebook): Comparison | null {
  const fits = notebook.fits.map(({ number, status }) => `${number} ${status}`).join();
  const { data } = useSWR(
    [`/api/v1/notebooks/${notebook.id}/comparison`, notebook.revision, fits],
    ([path]) => read<Comparison>(path),
    {
      keepPreviousData: true,
      revalidateOnFocus: false,
      refreshInterval: (known) => (known && anyRunning(known) ? between : 0),
    },
  );
  return data ?? null;
}
