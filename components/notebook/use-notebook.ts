'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import type { Notebook, PatchNotebook } from '@/lib/schemas';

export type Edit = Omit<PatchNotebook, 'revision'>;

/** Somebody else saved first: what stands now, beside an edit of what stood before. */
export interface Conflict {
  /** The revision that the edit was begun on. */
  base: number;
  theirs: Notebook;
}

export interface NotebookState {
  notebook: Notebook;
  /** Reads it again. */
  refresh: () => Promise<unknown>;
  /** Puts in place what a save answered. */
  put: (notebook: Notebook) => Promise<unknown>;
}

export function useNotebook(initial: Notebook): NotebookState {
  const path = `/api/v1/notebooks/${initial.id}`;
  const { data: notebook = initial, mutate } = useSWR(path, read<Notebook>, {
    fallbackData: initial,
    revalidateOnMount: false,
  });
  return {
    notebook,
    refresh: () => mutate(),
    // An answer that was overtaken by news of a later revision doesn't take that back.
    put: (saved) =>
      mutate((standing) => (standing && standing.revision > saved.revision ? standing : saved), {
        revalidate: false,
      }),
  };
}

export interface SectionSave {
  saving: boolean;
  error: RequestError | null;
  conflict: Conflict | null;
  /** Saves an edit of the revision it was made on; true where it is stored. */
  save: (edit: Edit, base: number) => Promise<boolean>;
  /** Drops the conflict; the other revision stands. */
  settle: () => void;
}

/** Saving of one section: each shows its own refusal beside its own fields. */
export function useSectionSave({ notebook, put }: NotebookState): SectionSave {
  const [saving, setSaving] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [conflict, setConflict] = useState<Conflict | null>(null);
  const path = `/api/v1/notebooks/${notebook.id}`;

  async function save(edit: Edit, base: number): Promise<boolean> {
    setSaving(true);
    setError(null);
    try {
      await put(await send<Notebook>('PATCH', path, { revision: base, ...edit }));
      setConflict(null);
      return true;
    } catch (thrown) {
      const refused = asRequestError(thrown);
      const theirs = refused.code === 'stale_revision' ? await read<Notebook>(path).catch(() => null) : null;
      if (theirs) {
        setConflict({ base, theirs });
        void put(theirs);
      } else setError(refused);
      return false;
    } finally {
      setSaving(false);
    }
  }

  return { saving, error, conflict, save, settle: () => setConflict(null) };
}
