'use client';

import { useEffect, useEffectEvent, useState, useSyncExternalStore } from 'react';
import { useNarrow } from '@/components/figures/figure';
import type { Fold, FoldState } from '@/components/ui/fold';
import { currentSection, type SectionStates } from './section-states';
import { sectionIds, type SectionId } from './sections';

/** What a reader chose, section by section; a section that was never touched isn't in it. */
export type FoldChoice = Partial<Record<SectionId, 'open' | 'folded'>>;

/** A choice belongs to one notebook and one person, also where two share a browser. */
export const foldKey = (notebookId: string, reader: string): string =>
  `beatnote-folds:${notebookId}:${reader}`;

/** Reads what was stored; anything else than sections and their two states is passed over. */
export function parseFolds(stored: string | null): FoldChoice {
  try {
    const given: unknown = JSON.parse(stored ?? '{}');
    if (typeof given !== 'object' || given === null) return {};
    return Object.fromEntries(
      Object.entries(given).filter(
        ([id, state]) => sectionIds.some((known) => known === id) && (state === 'open' || state === 'folded'),
      ),
    ) as FoldChoice;
  } catch {
    return {};
  }
}

/**
 * How a section stands. Before the browser has said how wide it is and what it remembers, `choice` is null: what isn't
 * current is left to the style sheet, which folds it on a phone.
 */
export function foldOf(
  id: SectionId,
  current: SectionId,
  choice: FoldChoice | null,
  narrow: boolean,
): FoldState {
  if (choice === null) return id === current ? 'open' : 'phone';
  return choice[id] ?? (narrow && id !== current ? 'folded' : 'open');
}

/** Stands in for the browser's storage where that is switched off or full. */
const unstored = new Map<string, string>();
const changed = new EventTarget();

function readStored(key: string): string {
  try {
    return unstored.get(key) ?? window.localStorage.getItem(key) ?? '';
  } catch {
    return unstored.get(key) ?? '';
  }
}

function store(key: string, choice: FoldChoice) {
  const text = JSON.stringify(choice);
  try {
    window.localStorage.setItem(key, text);
  } catch {
    unstored.set(key, text);
  }
  changed.dispatchEvent(new Event('change'));
}

function onChange(listener: () => void) {
  changed.addEventListener('change', listener);
  return () => changed.removeEventListener('change', listener);
}

/** What the sheet gives each section; its sentence is the section's own. */
export type SectionFold = Pick<Fold, 'state' | 'onToggle'>;

export interface Folds {
  of: (id: SectionId) => FoldState;
  toggle: (id: SectionId) => void;
  /** Opens the section that an address such as "#priors" names. */
  open: (href: string) => void;
}

/** Which sections are folded: the reader's own choice; without one all are open, and on a phone only the current one. */
export function useFolds(key: string, states: SectionStates): Folds {
  // A section that becomes current later doesn't fold what is being read.
  const [current] = useState(() => currentSection(states));
  const narrow = useNarrow();
  const stored = useSyncExternalStore(
    onChange,
    () => readStored(key),
    () => null,
  );
  const choice = stored === null ? null : parseFolds(stored || null);
  const of = (id: SectionId) => foldOf(id, current, choice, narrow);
  // Read again from the store: before the first paint settles, `choice` isn't known yet.
  const set = (id: SectionId, state: 'open' | 'folded') =>
    store(key, { ...parseFolds(readStored(key) || null), [id]: state });

  function open(href: string) {
    const id = sectionIds.find((each) => href === `#${each}`);
    if (id && of(id) !== 'open') set(id, 'open');
  }

  const follow = useEffectEvent(() => open(window.location.hash));
  useEffect(() => {
    const listener = () => follow();
    listener();
    window.addEventListener('hashchange', listener);
    return () => window.removeEventListener('hashchange', listener);
  }, []);

  return { of, open, toggle: (id) => set(id, of(id) === 'open' ? 'folded' : 'open') };
}
