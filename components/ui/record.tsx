import type { ReactNode } from 'react';
import { Stamp } from './num';

/** Who set something and when, in the margin: a sentence and a stamp. Names inside stand in `<b>`. */
export function Record({ at, children }: { at?: string; children: ReactNode }) {
  return (
    <p className="mb-2 font-controls text-note text-ink-2 max-desk:col-span-full max-desk:mb-1 [&_b]:font-medium [&_b]:text-ink">
      {children}
      {at ? (
        <>
          {' '}
          <br className="max-desk:hidden" />
          <Stamp at={at} />
        </>
      ) : null}
    </p>
  );
}

export interface RemarkProps {
  id?: string;
  /** "a", as the text refers to it. */
  letter: string;
  by: string;
  role?: string;
  at: string;
  children: ReactNode;
  /** State and what can be done. */
  actions?: ReactNode;
}

export function Remark({ id, letter, by, role, at, children, actions }: RemarkProps) {
  return (
    <div id={id} className="mb-3 border-t border-hairline pt-[6px] text-small">
      <div className="mb-px flex flex-wrap justify-between gap-x-[8px] font-controls text-note text-ink-2">
        <span>
          <span className="text-action italic">{letter}</span>&ensp;
          <b className="font-medium text-ink">{by}</b>
          {role ? `, ${role}` : null}
        </span>
        <Stamp at={at} short />
      </div>
      <div className="[&>p]:mb-1">{children}</div>
      {actions ? <div className="no-print flex gap-2 font-controls text-note">{actions}</div> : null}
    </div>
  );
}
