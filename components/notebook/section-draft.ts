'use client';

import { useState } from 'react';
import type { Notebook } from '@/lib/schemas';
import type { Conflict, SectionSave } from './use-notebook';

/** What a section's form holds before it is saved, with the revision that it was begun on. */
export interface Draft<T> {
  value: T;
  changed: boolean;
  /** Revision that a save names: the last one in which this section was as when the first change was made. */
  base: number;
  /** What was stored then: what differs from it is one's own change. */
  origin: T;
  /** Somebody else has saved this very section since. */
  behind: boolean;
  change: (next: T) => void;
  /** Drops the changes. */
  reset: () => void;
}

const same = (a: unknown, b: unknown) => JSON.stringify(a) === JSON.stringify(b);

interface Own<T> {
  value: T;
  base: number;
  origin: T;
}

/** How a draft stands beside what is stored now. */
export function standing<T>(
  own: Own<T> | null,
  stored: T,
  revision: number,
): Omit<Draft<T>, 'change' | 'reset'> {
  if (own === null || same(own.value, stored)) {
    return { value: stored, changed: false, base: revision, origin: stored, behind: false };
  }
  // A revision that left this section alone is no reason to ask: the change is one of what stands.
  const behind = !same(own.origin, stored);
  return { ...own, changed: true, base: behind ? own.base : revision, behind };
}

/**
 * Follows what is stored as long as nothing is changed here; from the first change on the form stands still, so that
 * another person's save doesn't take it away under one's hands.
 */
export function useDraft<T>(stored: T, revision: number): Draft<T> {
  const [own, setOwn] = useState<Own<T> | null>(null);
  const state = standing(own, stored, revision);
  return {
    ...state,
    change: (next) => setOwn({ value: next, base: state.base, origin: state.origin }),
    reset: () => setOwn(null),
  };
}

/** What a section's changes have run into: a revision that was told of, or one that refused a save. */
export function conflictOf<T>(
  draft: Pick<Draft<T>, 'behind' | 'base'>,
  notebook: Notebook,
  { conflict }: Pick<SectionSave, 'conflict'>,
): Conflict | null {
  if (draft.behind) return { base: draft.base, theirs: notebook };
  return (
    conflict && {
      ...conflict,
      theirs: notebook.revision > conflict.theirs.revision ? notebook : conflict.theirs,
    }
  );
}
