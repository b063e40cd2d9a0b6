import type { ReactNode } from 'react';
import { StateWord } from './state-word';

export interface MessageProps {
  level: 'error' | 'warning';
  /** What happened and where: "Fit 3 stopped at draw 1 846 of replica 2". */
  title: ReactNode;
  /** What is kept, what to do. */
  children?: ReactNode;
  /** Already there when the page was opened: not announced. */
  quiet?: boolean;
}

export function Message({ level, title, children, quiet }: MessageProps) {
  const error = level === 'error';
  return (
    <div
      role={quiet ? undefined : error ? 'alert' : 'status'}
      className={`my-4 max-w-figure break-inside-avoid border-l-2 pl-3 [&>p:last-child]:mb-0 ${error ? 'border-bad' : 'border-warn'}`}
    >
      <div className="mb-px text-note">
        <StateWord kind={error ? 'bad' : 'warn'}>{error ? 'Error' : 'Warning'}</StateWord>
      </div>
      <h3 className="mb-1 text-subheading">{title}</h3>
      {children}
    </div>
  );
}

/** Numbered steps under "What you can do". */
export function Steps({ children }: { children: ReactNode }) {
  return (
    <ol className="max-w-measure [counter-reset:step] [&>li]:relative [&>li]:mb-1 [&>li]:pl-4 [&>li]:[counter-increment:step] [&>li]:before:absolute [&>li]:before:left-0 [&>li]:before:text-ink-2 [&>li]:before:content-[counter(step)]">
      {children}
    </ol>
  );
}
