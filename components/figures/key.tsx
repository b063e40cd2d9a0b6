import type { ReactNode } from 'react';
import { markerPath } from '@/lib/figures/paths';

export interface KeyEntry {
  /** Class of the line: "sum", "ln f1", "env", …; "band" for a band. */
  line: string;
  /** 0-based field whose marker sits on the line. */
  field?: number;
  label: string;
}

/** Width that a label takes, from the serif's mean width at 14 px; a little too wide rather than too narrow. */
function labelWidth(label: string): number {
  return 37 + 7.1 * label.length;
}

const gap = 26;

/** Places entries one after the other from `from`, breaking rows at `to`. */
export function placeKey(entries: readonly KeyEntry[], from: number, to: number) {
  let x = from;
  let row = 0;
  const places = entries.map((entry) => {
    const width = labelWidth(entry.label);
    if (x > from && x + width > to) {
      x = from;
      row++;
    }
    const place = { x, row };
    x += width + gap;
    return place;
  });
  return { places, rows: entries.length ? row + 1 : 0 };
}

export interface KeyProps {
  entries: readonly KeyEntry[];
  from: number;
  to: number;
  /** Middle of the first row. */
  y: number;
}

/** Names curves in lines above the frame; never a box. */
export function Key({ entries, from, to, y }: KeyProps): ReactNode {
  const { places } = placeKey(entries, from, to);
  return entries.map((entry, i) => {
    const { x, row } = places[i];
    const middle = y + 21 * row;
    return (
      <g key={entry.label}>
        {entry.line === 'band' ? (
          <>
            <path className="b95" d={`M${x} ${middle - 7}h30v14h-30z`} />
            <path className="b68" d={`M${x} ${middle - 3.5}h30v7h-30z`} />
          </>
        ) : (
          <path className={entry.line} d={`M${x} ${middle}h30`} />
        )}
        {entry.field === undefined ? null : (
          <path className={`mk f${entry.field + 1}`} d={markerPath(entry.field, x + 15, middle, 3)} />
        )}
        <text className="an" x={x + 37} y={middle + 4.5}>
          {entry.label}
        </text>
      </g>
    );
  });
}
