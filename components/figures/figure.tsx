'use client';

import dynamic from 'next/dynamic';
import {
  use,
  useEffect,
  useRef,
  useState,
  useSyncExternalStore,
  type CSSProperties,
  type ReactNode,
} from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';
import { FigureTime, usePrinting } from '../ui/fold';
import { FigureCaption } from './figure-caption';

/** Loaded when somebody asks for the numbers. */
const NumbersTable = dynamic(() => import('./numbers-table').then((module) => module.NumbersTable));

/** What every figure is given beside its data. */
export interface FigureFacts {
  /** Number in the text; left out, the caption starts without one. */
  number?: number;
  /** One sentence made from state, without "Fig. n.". */
  caption: ReactNode;
  /** Accessible name. */
  label: string;
  /** Name of saved files, without ending. */
  fileName: string;
  /** False where the group is blind: nothing to save, no table. */
  save?: boolean;
  id?: string;
}

export interface FigureSize {
  /** Width to draw at, in pixels. */
  width: number;
  /** True on a phone: fewer ticks, key above. */
  narrow: boolean;
}

export interface FigureProps extends FigureFacts {
  /** Height on a wide screen and on a phone, in pixels; a multiple of 7 keeps the text on its grid. */
  height: number;
  heightNarrow: number;
  /** The numbers behind it, made only when they are asked for. */
  numbers?: () => FigureNumbers;
  /** Controls of the figure's own, such as the choice of parameters. */
  above?: ReactNode;
  children: (size: FigureSize) => ReactNode;
}

/** Paper is never a phone, however narrow. */
const phone = 'screen and (max-width: 759px)';

/** Width on paper, where the page is scaled to hold it; nothing can be measured in time for printing. */
const onPaper = 720;

function onPhoneChange(listener: () => void) {
  const query = window.matchMedia(phone);
  query.addEventListener('change', listener);
  return () => query.removeEventListener('change', listener);
}

/** True on a phone; on the server the wide drawing is assumed. */
export function useNarrow(): boolean {
  return useSyncExternalStore(
    onPhoneChange,
    () => window.matchMedia(phone).matches,
    () => false,
  );
}

/**
 * The frame of a figure: drawing, caption and Save. Its height is set by the style sheet before anything is measured,
 * so that the text below never moves; the width follows the column.
 */
export function Figure(props: FigureProps) {
  const { number, caption, label, fileName, save = true, id, height, heightNarrow, numbers, above } = props;
  const holder = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(onPaper);
  const [tabled, setTabled] = useState(false);
  const narrow = useNarrow();
  const printing = usePrinting();
  const drawn = use(FigureTime) === 'now';

  useEffect(() => {
    const element = holder.current;
    if (!element) return;
    const observer = new ResizeObserver(([entry]) => {
      const measured = Math.floor(entry.contentRect.width);
      if (measured > 0) setWidth(measured);
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  const saved = save && numbers ? { numbers, fileName } : undefined;
  const heights = { '--height': `${height}px`, '--height-narrow': `${heightNarrow}px` } as CSSProperties;
  return (
    <figure id={id} className="my-4 max-w-figure">
      {above}
      <div
        ref={holder}
        role="img"
        aria-label={label}
        style={heights}
        className="fig-svg min-h-(--height) max-tablet:min-h-(--height-narrow)"
      >
        {drawn ? props.children({ width: printing ? onPaper : width, narrow }) : null}
      </div>
      <FigureCaption
        number={number}
        saved={saved}
        drawing={holder}
        tabled={tabled}
        onTable={() => setTabled(!tabled)}
      >
        {caption}
      </FigureCaption>
      {tabled && saved ? <NumbersTable numbers={saved.numbers} label={label} /> : null}
    </figure>
  );
}
