import type { ReactNode } from 'react';

export interface WordButtonProps {
  id?: string;
  onClick: () => void;
  /** Given: it opens a form below, which is open or not. */
  expanded?: boolean;
  /** What it acts on, for those who hear it away from its row. */
  of?: string;
  children: ReactNode;
}

/** A button inside a row of a table: a word in the colour of actions, as tall as a target has to be. */
export function WordButton({ id, onClick, expanded, of, children }: WordButtonProps) {
  return (
    <button
      id={id}
      type="button"
      onClick={onClick}
      aria-expanded={expanded}
      className="no-print inline-flex min-h-target items-center font-controls text-note text-action underline decoration-1 underline-offset-[3px]"
    >
      {children}
      {of ? <span className="sr-only"> {of}</span> : null}
    </button>
  );
}
