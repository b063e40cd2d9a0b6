'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import type { Notebook, PatchNotebook } from '@/lib/schemas';

export type Edit = Omit<PatchNotebook, 'revision'>;

/** A save that was refused because somebody else saved first: their notebook beside one's own edit. */
export interface Conflict {
  mine: Edit;
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
    put: (saved) => mutate(saved, { revalidate: false }),
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
      if (theirs) setConflict({ mine: edit, base, theirs });
      else setError(refused);
      return false;
    } finally {
      setSaving(false);
    }
  }

  return { saving, error, conflict, save, settle: () => setConflict(null) };
}
