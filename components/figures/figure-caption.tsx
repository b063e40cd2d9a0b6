'use client';

import type { ReactNode, RefObject } from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';

export interface Saved {
  numbers: () => FigureNumbers;
  fileName: string;
}

export interface FigureCaptionProps {
  number?: number;
  saved?: Saved;
  /** Holds the drawing as its first svg. */
  drawing: RefObject<HTMLElement | null>;
  tabled: boolean;
  onTable: () => void;
  children: ReactNode;
}

const item =
  'cursor-pointer px-[4px] text-action underline decoration-1 underline-offset-[3px] max-tablet:py-[8px]';

/** Loaded when somebody saves a figure. */
const saving = () => import('./save-figure');

/** Opens in line at the right of the caption. */
function Save({
  number,
  saved,
  drawing,
  tabled,
  onTable,
}: Omit<FigureCaptionProps, 'children' | 'saved'> & { saved: Saved }) {
  const { numbers, fileName } = saved;
  const svg = () => drawing.current?.querySelector('svg');
  const save = (how: 'saveSvg' | 'savePng') => async () => {
    const found = svg();
    if (found) await (await saving())[how](found, fileName);
  };
  return (
    <details className="no-print group ml-auto flex-none text-right font-controls text-note max-tablet:mt-[2px] max-tablet:text-left">
      <summary
        aria-label={number === undefined ? 'Save the figure' : `Save figure ${number}`}
        className="-my-[3px] min-h-[27px] rounded px-[4px] py-[3px] text-ink-2 hover:text-ink max-tablet:my-0 max-tablet:min-h-[44px] max-tablet:px-0 max-tablet:py-[11px]"
      >
        Save
        <span
          aria-hidden="true"
          className="ml-1 inline-block size-[5px] -translate-y-[3px] rotate-45 border-r-[1.2px] border-b-[1.2px] border-current transition-transform duration-quick group-open:translate-y-0 group-open:rotate-[225deg]"
        />
      </summary>
      <ul className="max-tablet:flex max-tablet:flex-wrap max-tablet:gap-3 max-tablet:pb-[8px]">
        <li>
          <button type="button" className={item} onClick={save('saveSvg')}>
            SVG
          </button>
        </li>
        <li>
          <button type="button" className={item} onClick={save('savePng')}>
            PNG
          </button>
        </li>
        <li>
          <button
            type="button"
            className={item}
            onClick={async () => (await saving()).saveCsv(numbers(), fileName)}
          >
            Numbers (CSV)
          </button>
        </li>
        <li>
          <button type="button" className={item} aria-expanded={tabled} onClick={onTable}>
            {tabled ? 'Close the table' : 'Numbers here'}
          </button>
        </li>
      </ul>
    </details>
  );
}

export function FigureCaption({ number, saved, drawing, tabled, onTable, children }: FigureCaptionProps) {
  return (
    <figcaption className="mt-2 flex items-baseline gap-3 text-small text-ink max-tablet:block">
      <span className="max-w-caption text-pretty">
        {number === undefined ? null : <b>Fig. {number}. </b>}
        {children}
      </span>
      {saved ? (
        <Save number={number} saved={saved} drawing={drawing} tabled={tabled} onTable={onTable} />
      ) : null}
    </figcaption>
  );
}
