'use client';

import { useState } from 'react';

/** What a section's form holds before it is saved, with the revision that it was begun on. */
export interface Draft<T> {
  value: T;
  changed: boolean;
  /** Revision that a save names: the one that stood when the first change was made. */
  base: number;
  /** What was stored then: what differs from it is one's own change. */
  origin: T;
  change: (next: T) => void;
  /** Drops the changes. */
  reset: () => void;
}

const same = (a: unknown, b: unknown) => JSON.stringify(a) === JSON.stringify(b);

/**
 * Follows what is stored as long as nothing is changed here; from the first change on the form stands still, so that
 * another person's save doesn't take it away under one's hands.
 */
export function useDraft<T>(stored: T, revision: number): Draft<T> {
  const [own, setOwn] = useState<{ value: T; base: number; origin: T } | null>(null);
  const changed = own !== null && !same(own.value, stored);
  return {
    value: changed ? own.value : stored,
    changed,
    base: changed ? own.base : revision,
    origin: changed ? own.origin : stored,
    change: (next) =>
      setOwn({
        value: next,
        base: changed ? own.base : revision,
        origin: changed ? own.origin : stored,
      }),
    reset: () => setOwn(null),
  };
}
