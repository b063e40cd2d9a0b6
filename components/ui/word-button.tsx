import type { ReactNode } from 'react';

export interface WordButtonProps {
  onClick: () => void;
  /** What it acts on, for those who hear it away from its row. */
  of?: string;
  children: ReactNode;
}

/** A button inside a row of a table: a word in the colour of actions, as tall as a target has to be. */
export function WordButton({ onClick, of, children }: WordButtonProps) {
  return (
    <button
      type="button"
      onClick={onClick}
      className="no-print inline-flex min-h-target items-center font-controls text-note text-action underline decoration-1 underline-offset-[3px]"
    >
      {children}
      {of ? <span className="sr-only"> {of}</span> : null}
    </button>
  );
}
