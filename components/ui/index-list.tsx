import type { ReactNode } from 'react';
import Link from 'next/link';
import { StateWord, type State } from './state-word';

export interface IndexSectionProps {
  id?: string;
  title: string;
  action?: ReactNode;
  /** `IndexEntry`s, or an `EmptyState`. */
  children: ReactNode;
}

export function IndexSection({ id, title, action, children }: IndexSectionProps) {
  return (
    <section id={id} aria-label={title} className="mb-8">
      <div className="flex min-h-[49px] items-start gap-3">
        <h2 className="text-heading">{title}</h2>
        {action ? <div className="no-print ml-auto flex items-center gap-2">{action}</div> : null}
      </div>
      {children}
    </section>
  );
}

export function IndexList({ children }: { children: ReactNode }) {
  return <ol className="[&>li:first-child>div]:border-ink">{children}</ol>;
}

export interface IndexEntryProps {
  number: ReactNode;
  title: ReactNode;
  href: string;
  /** One or two sentences. */
  children?: ReactNode;
  /** A small figure, 120 px wide. */
  figure?: ReactNode;
  states?: State[];
  /** "10 March, W. Li" */
  note?: ReactNode;
}

export function IndexEntry({ number, title, href, children, figure, states = [], note }: IndexEntryProps) {
  return (
    <li>
      <div className="grid grid-cols-[28px_minmax(0,1fr)_120px_136px] items-start gap-x-[18px] border-t border-hairline pt-[13px] pb-2 max-tablet:grid-cols-[26px_minmax(0,1fr)] max-tablet:gap-x-[10px]">
        <span className="font-numbers text-[14px]/[28px] text-ink-2">{number}</span>
        <div>
          <h3 className="text-entry">
            <Link
              href={href}
              className="text-ink no-underline underline-offset-4 hover:underline hover:decoration-1"
            >
              {title}
            </Link>
          </h3>
          <p className="mb-0 text-small text-ink-2">{children}</p>
        </div>
        <div className="pt-1 max-tablet:col-start-2">{figure}</div>
        <div className="pt-[4px] max-tablet:col-start-2">
          {states.map((state, i) => (
            <div key={i} className="flex max-tablet:mr-[10px] max-tablet:inline-flex">
              <StateWord kind={state.kind}>{state.word}</StateWord>
            </div>
          ))}
          {note ? (
            <span className="block font-controls text-note text-ink-2 max-tablet:inline">{note}</span>
          ) : null}
        </div>
      </div>
    </li>
  );
}
