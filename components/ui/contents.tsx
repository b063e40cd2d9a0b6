'use client';

import { useEffect, useRef, useState, type ReactNode } from 'react';
import { StateWord, type State } from './state-word';

export interface ContentsEntry {
  href: string;
  number?: number;
  title: string;
  state?: State;
  /** A word without a sign: "none yet". */
  note?: ReactNode;
}

export interface ContentsProps {
  /** What is listed, for assistive technology: "Sections". */
  label: string;
  entries: ContentsEntry[];
  /** Address of the current entry; left out, the entry in view is followed. */
  current?: string;
  /** Called before the browser goes to an entry, so that a folded section is open when it gets there. */
  onGo?: (href: string) => void;
}

/** The last entry whose section has passed the upper third of the window. */
function useEntryInView(entries: ContentsEntry[], given?: string): string | undefined {
  const [seen, setSeen] = useState<string>();
  const addresses = entries.map((e) => e.href).join('\n');
  useEffect(() => {
    if (given !== undefined) return;
    const find = () => {
      const line = window.innerHeight / 3;
      let found: string | undefined;
      // At the top the first entry holds, however short its section is.
      for (const href of window.scrollY > 0 ? addresses.split('\n') : []) {
        const target = href.startsWith('#') ? document.getElementById(href.slice(1)) : null;
        if (target && target.getBoundingClientRect().top <= line) found = href;
      }
      setSeen(found);
    };
    find();
    window.addEventListener('scroll', find, { passive: true });
    window.addEventListener('resize', find);
    return () => {
      window.removeEventListener('scroll', find);
      window.removeEventListener('resize', find);
    };
  }, [addresses, given]);
  return given ?? seen ?? entries[0]?.href;
}

function Said({ entry }: { entry: ContentsEntry }) {
  if (entry.state) return <StateWord kind={entry.state.kind}>{entry.state.word}</StateWord>;
  if (entry.note) return <span className="font-controls text-note text-ink-2">{entry.note}</span>;
  return null;
}

export function Contents({ label, entries, current, onGo }: ContentsProps) {
  const here = useEntryInView(entries, current);
  const shown = entries.find((e) => e.href === here) ?? entries[0];
  const folded = useRef<HTMLDetailsElement>(null);
  return (
    <>
      <nav
        aria-label={label}
        className="no-print sticky top-0 text-note max-h-screen overflow-auto pt-8 max-tablet:hidden"
      >
        <h2 className="mb-[6px] pl-4 text-[15px]/[21px] text-ink-2 italic">Contents</h2>
        <ol>
          {entries.map((entry) => (
            <li key={entry.href} className="border-t border-hairline last:border-b">
              <a
                href={entry.href}
                onClick={() => onGo?.(entry.href)}
                aria-current={entry.href === here ? 'location' : undefined}
                className="group grid grid-cols-[20px_1fr] gap-x-[8px] pt-[6px] pb-1 text-ink no-underline aria-[current]:shadow-[inset_2px_0_0_var(--action)]"
              >
                <span className="text-right font-numbers text-record text-ink-2">{entry.number}</span>
                <span className="text-[16px]/[21px] underline-offset-[3px] group-hover:underline group-hover:decoration-1 group-aria-[current]:font-current">
                  {entry.title}
                </span>
                <span className="col-start-2 empty:hidden">
                  <Said entry={entry} />
                </span>
              </a>
            </li>
          ))}
        </ol>
      </nav>
      {shown ? (
        <details
          ref={folded}
          className="no-print sticky top-0 z-10 text-note -mx-gutter border-b border-hairline bg-paper px-gutter tablet:hidden"
        >
          <summary className="flex min-h-[44px] items-center gap-[10px] text-[16px]/[21px]">
            <span className="sr-only">Contents, at </span>
            <span className="font-numbers text-[12px] text-ink-2">{shown.number}</span>
            {shown.title}
            <span className="ml-auto">
              <Said entry={shown} />
            </span>
            <svg
              width="12"
              height="12"
              viewBox="0 0 12 12"
              fill="none"
              stroke="currentColor"
              aria-hidden="true"
            >
              <path d="M2 4l4 4 4-4" />
            </svg>
          </summary>
          <nav aria-label={label}>
            <ol className="max-h-[70vh] overflow-auto border-t border-hairline py-[6px]">
              {entries.map((entry) => (
                <li key={entry.href}>
                  <a
                    href={entry.href}
                    onClick={() => {
                      folded.current?.removeAttribute('open');
                      onGo?.(entry.href);
                    }}
                    className="flex min-h-[44px] items-center gap-[10px] text-[16px]/[21px] text-ink no-underline"
                  >
                    <span className="font-numbers text-[12px] text-ink-2">{entry.number}</span>
                    {entry.title}
                    <span className="ml-auto">
                      <Said entry={entry} />
                    </span>
                  </a>
                </li>
              ))}
            </ol>
          </nav>
        </details>
      ) : null}
    </>
  );
}
