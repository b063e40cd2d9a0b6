import type { ReactNode } from 'react';

export interface WordButtonProps {
  id?: string;
  onClick: () => void;
  /** What it acts on, for those who hear it away from its row. */
  of?: string;
  children: ReactNode;
}

/** A button inside a row of a table: a word in the colour of actions, as tall as a target has to be. */
export function WordButton({ id, onClick, of, children }: WordButtonProps) {
  return (
    <button
      id={id}
      type="button"
      onClick={onClick}
      className="no-print inline-flex min-h-target items-center font-controls text-note text-action underline decoration-1 underline-offset-[3px]"
    >
      {children}
      {of ? <span className="sr-only"> {of}</span> : null}
    </button>
  );
}
