'use client';

import type { ReactNode } from 'react';
import { themeKey } from './theme-script';

/** Turns to the other colours and remembers the choice; where storage is closed it holds for this page. */
function turnTheme() {
  const root = document.documentElement;
  const system = window.matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light';
  const next = (root.dataset.theme ?? system) === 'dark' ? 'light' : 'dark';
  root.dataset.theme = next;
  try {
    window.localStorage.setItem(themeKey, next);
  } catch {
    // A browser may forbid storage; the page is turned all the same.
  }
}

export function Footer({ version, children }: { version: string; children?: ReactNode }) {
  return (
    <footer className="no-print border-t border-hairline">
      <div className="mx-auto flex max-w-page flex-wrap items-baseline gap-x-3 px-gutter pt-2 pb-4 font-controls text-note text-ink-2">
        <span>
          Beatnote <span className="font-numbers text-[12px]">{version}</span>
        </span>
        <span>Times are UTC</span>
        {children}
        <button
          type="button"
          onClick={turnTheme}
          className="ml-auto min-h-target text-action underline decoration-1 underline-offset-[3px]"
        >
          Light or dark
        </button>
      </div>
    </footer>
  );
}
