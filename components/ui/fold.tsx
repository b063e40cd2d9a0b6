'use client';

import { createContext, memo, useState, useSyncExternalStore, type ReactNode } from 'react';

/** `phone`: folded where the screen is narrow, by the style sheet, until the browser's own choice is known. */
export type FoldState = 'open' | 'folded' | 'phone';

export interface Fold {
  state: FoldState;
  /** What stands inside, in one sentence from its state. */
  sentence: ReactNode;
  onToggle: () => void;
}

/** Whether a figure draws: not while its section is folded. */
export const FigureTime = createContext<'now' | 'never'>('now');

function onPrint(listener: () => void) {
  const query = window.matchMedia('print');
  query.addEventListener('change', listener);
  return () => query.removeEventListener('change', listener);
}

/** True while the page is laid out for paper, which shows everything. */
export function usePrinting(): boolean {
  return useSyncExternalStore(
    onPrint,
    () => window.matchMedia('print').matches,
    () => false,
  );
}

/** Whether what a section holds is to be seen: not while it is folded, except on paper. */
export function useShown({ state }: Pick<Fold, 'state'>): boolean {
  return usePrinting() || state !== 'folded';
}

/** Stays as it was last drawn while it isn't shown, whatever its section is given meanwhile. */
const Held = memo(
  function Held({ children }: { shown: boolean; children: ReactNode }) {
    return children;
  },
  (_, next) => !next.shown,
);

/**
 * What a section holds. Once opened it stays in place when it is folded, so that nothing half written in it is lost;
 * its figures go and
 * nothing of it is computed again until it is opened. One that was never opened isn't made at all.
 */
export function FoldBody({ id, state, children }: { id: string; state: FoldState; children: ReactNode }) {
  const printing = usePrinting();
  const shown = useShown({ state });
  const [seen, setSeen] = useState(state === 'open');
  if (state === 'open' && !seen) setSeen(true);
  const made = seen || shown;
  return (
    <div id={id} className="folded:hidden">
      {made ? (
        <FigureTime value={printing || state === 'open' ? 'now' : 'never'}>
          <Held shown={shown}>{children}</Held>
        </FigureTime>
      ) : null}
    </div>
  );
}

/** The title of a section as the button that folds it. */
export function FoldButton({
  controls,
  fold,
  children,
}: {
  controls: string;
  fold: Fold;
  children: ReactNode;
}) {
  return (
    <button
      type="button"
      aria-expanded={fold.state !== 'folded'}
      aria-controls={controls}
      suppressHydrationWarning
      onClick={fold.onToggle}
      className="min-h-target text-left decoration-1 underline-offset-[4px] hover:underline"
    >
      {children}
      <svg
        width="12"
        height="12"
        viewBox="0 0 12 12"
        fill="none"
        stroke="currentColor"
        aria-hidden="true"
        className="no-print ml-[10px] inline-block rotate-180 align-baseline text-ink-2 folded:rotate-0"
      >
        <path d="M2 4l4 4 4-4" />
      </svg>
    </button>
  );
}
