import type { ReactNode } from 'react';

/** A number in prose: lining figures of one width, never broken. */
export function Num({ children }: { children: ReactNode }) {
  return <span className="lining-nums tabular-nums whitespace-nowrap">{children}</span>;
}

/** Date and minute as the record writes them, UTC: 2027-03-09 16:40. */
function written(iso: string): string {
  return iso.slice(0, 16).replace('T', ' ');
}

/** A date, hash or code in the record, in the monospaced face; `short` leaves the year out where room is narrow. */
export function Stamp({ at, short, children }: { at?: string; short?: boolean; children?: ReactNode }) {
  const look = 'font-numbers text-[12px]/[21px] whitespace-nowrap';
  if (at)
    return (
      <time className={look} dateTime={at}>
        {short ? written(at).slice(5) : written(at)}
      </time>
    );
  return <span className={look}>{children}</span>;
}
