import type { ReactNode } from 'react';

export type StateKind = 'ok' | 'open' | 'run' | 'review' | 'warn' | 'bad' | 'old' | 'wait' | 'blind';

export interface State {
  kind: StateKind;
  word: ReactNode;
}

/** Line drawings on 12 × 12; the half disc and the bar are filled. */
const drawings: Record<StateKind, ReactNode> = {
  ok: <path d="M1.5 6.5l3 3 6-7" />,
  open: <circle cx="6" cy="6" r="4" />,
  run: <path d="M.5 6c1.4-5 2.6-5 3.7 0s2.5 5 3.7 0 2.2-5 3.6-1" />,
  review: (
    <>
      <circle cx="6" cy="6" r="4" />
      <path d="M6 2a4 4 0 0 1 0 8z" fill="currentColor" stroke="none" />
    </>
  ),
  warn: <path d="M6 1.2L11.2 10.8H.8zM6 4.6v3M6 9v.6" />,
  bad: <path d="M2 2l8 8M10 2l-8 8" />,
  old: <path d="M2 3v3h3M2.3 6A4 4 0 1 1 3.6 9.2" />,
  wait: <path d="M1.5 6h9" />,
  blind: <path d="M1 3.6h10v4.8H1z" fill="currentColor" />,
};

const signColour: Partial<Record<StateKind, string>> = {
  ok: 'text-ok',
  warn: 'text-warn',
  bad: 'text-bad',
  run: 'text-action',
};

/** Settled is told quietly: its sign alone takes the colour. */
const wordColour: Partial<Record<StateKind, string>> = {
  warn: 'text-warn',
  bad: 'text-bad',
  run: 'text-action',
};

/** The drawing alone; it repeats a word and is therefore hidden from assistive technology. */
export function Sign({ kind }: { kind: StateKind }) {
  return (
    <svg
      viewBox="0 0 12 12"
      aria-hidden="true"
      className={`size-[12px] flex-none fill-none stroke-current [stroke-width:1.4] ${signColour[kind] ?? ''}`}
    >
      {drawings[kind]}
    </svg>
  );
}

/** A state is a sign and a word, in place, beside what it describes. */
export function StateWord({ kind, children }: { kind: StateKind; children: ReactNode }) {
  return (
    <span
      className={`inline-flex items-center gap-[6px] font-controls text-note whitespace-nowrap ${wordColour[kind] ?? 'text-ink-2'}`}
    >
      <Sign kind={kind} />
      {children}
    </span>
  );
}
