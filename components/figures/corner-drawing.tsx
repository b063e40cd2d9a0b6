import { useMemo, type ReactNode } from 'react';
import {
  joint,
  jointPaths,
  marginalPaths,
  panelScales,
  type Marginal,
  type PanelPlace,
} from '@/lib/figures/corner';
import { linearTicks, type Tick } from '@/lib/figures/ticks';
import type { CornerParameter } from './corner-figure';
import type { FigureSize } from './figure';
import { SvgSym } from './svg-text';

export interface ShownParameter {
  parameter: CornerParameter;
  marginal: Marginal;
  text: { median: string; up: string; down: string };
}

const gap = 8;
const top = 26;
const below = 56;

function panelSize(count: number, { width, narrow }: FigureSize): number {
  const left = narrow ? 44 : 52;
  const free = width - left - 8 - gap * Math.max(0, count - 1);
  return Math.min(narrow ? 150 : 200, free / Math.max(1, count));
}

/** Height of the drawing, rounded up to the grid of the text. */
export function cornerHeight(count: number, size: FigureSize): number {
  return Math.ceil((top + count * panelSize(count, size) + (count - 1) * gap + below) / 7) * 7;
}

function places(count: number, size: FigureSize): (column: number, row: number) => PanelPlace {
  const side = panelSize(count, size);
  const left = size.narrow ? 44 : 52;
  return (column, row) => ({ left: left + column * (side + gap), top: top + row * (side + gap), size: side });
}

/** Few ticks: labels of neighbours mustn't meet, and none stands in a panel's corner. */
function panelTicks(m: Marginal, side: number): Tick[] {
  const { lo, hi } = m.axis;
  const inside = (count: number) =>
    linearTicks(lo, hi, count).filter(({ value, major }) => {
      const share = (value - lo) / (hi - lo);
      return major && share > 0.06 && share < 0.94;
    });
  const fits = (ticks: Tick[]) =>
    ticks.length < 2 ||
    (side * (ticks[1].value - ticks[0].value)) / (hi - lo) >
      7.2 * Math.max(...ticks.map((t) => t.label.length)) + 6;
  return [3, 2, 1].map(inside).find((ticks) => ticks.length > 0 && fits(ticks)) ?? [];
}

export function CornerDrawing({ shown, size }: { shown: readonly ShownParameter[]; size: FigureSize }) {
  const count = shown.length;
  const place = places(count, size);
  return (
    <svg width={size.width} height={cornerHeight(count, size)} aria-hidden="true">
      {shown.map((row, r) =>
        shown
          .slice(0, r)
          .map((column, c) => (
            <JointPanel
              key={`${row.parameter.name} ${column.parameter.name}`}
              x={column.marginal}
              y={row.marginal}
              place={place(c, r)}
              labelled={c === 0}
            />
          )),
      )}
      {shown.map((one, i) => (
        <DiagonalPanel key={one.parameter.name} one={one} place={place(i, i)} />
      ))}
      {shown.map((one, i) => (
        <OuterNames
          key={one.parameter.name}
          one={one}
          bottom={place(i, count - 1)}
          row={i > 0 ? place(0, i) : null}
        />
      ))}
      {count > 1 ? <RegionKey right={size.width - (size.narrow ? 0 : 10)} /> : null}
    </svg>
  );
}

interface JointPanelProps {
  x: Marginal;
  y: Marginal;
  place: PanelPlace;
  /** Leftmost of its row: the vertical axis has its numbers; on a phone none beside the name. */
  labelled: boolean;
}

function JointPanel({ x, y, place, labelled }: JointPanelProps) {
  const { left, top: upper, size: side } = place;
  const both = useMemo(() => joint(x, y), [x, y]);
  const paths = useMemo(
    () => jointPaths(x, y, both, { left, top: upper, size: side }),
    [x, y, both, left, upper, side],
  );
  const { toX, toY } = panelScales(x.axis, y.axis, place);
  return (
    <g>
      <path className="dots" d={paths.dots} />
      <path className="b95" d={paths.outer} />
      <path className="b68" d={paths.inner} />
      <path className="c95" d={paths.outer} />
      <path className="c68" d={paths.inner} />
      <path className="ax" d={`M${left} ${upper}v${side}h${side}`} />
      {panelTicks(x, side).map((tick) => (
        <path key={`x${tick.value}`} className="tk" d={`M${toX(tick.value).toFixed(1)} ${upper + side}v-4`} />
      ))}
      {panelTicks(y, side).map((tick) => (
        <g key={`y${tick.value}`}>
          <path className="tk" d={`M${left} ${toY(tick.value).toFixed(1)}h4`} />
          {labelled && (left > 50 || toY(tick.value) > upper + 24) ? (
            <text className="tl" x={left - 7} y={toY(tick.value) + 4} textAnchor="end">
              {tick.label}
            </text>
          ) : null}
        </g>
      ))}
    </g>
  );
}

function DiagonalPanel({ one, place }: { one: ShownParameter; place: PanelPlace }) {
  const { left, top: upper, size: side } = place;
  const { parameter, marginal: m, text } = one;
  const paths = useMemo(() => marginalPaths(m, { left, top: upper, size: side }), [m, left, upper, side]);
  const { toX } = panelScales(m.axis, m.axis, place);
  const right = left + side;
  return (
    <g>
      <path className="b68" d={paths.area} />
      <path className={parameter.field === null ? 'sum' : `ln f${parameter.field + 1}`} d={paths.line} />
      <path className="lead" d={paths.median} />
      <path className="ax" d={`M${left} ${upper + side}h${side}`} />
      {panelTicks(m, side).map((tick) => (
        <path key={tick.value} className="tk" d={`M${toX(tick.value).toFixed(1)} ${upper + side}v-4`} />
      ))}
      <text className="at" x={left + 2} y={upper - 9}>
        <SvgSym {...parameter.symbol} />
      </text>
      <MedianText right={right} y={upper - 9} text={text} />
    </g>
  );
}

/** Median with the ends of the 68 % interval raised and lowered after it. */
function MedianText({ right, y, text }: { right: number; y: number; text: ShownParameter['text'] }) {
  // Both ends are set from one left edge; the face is monospaced, 0.6 em a character.
  const width = 6 * Math.max(text.up.length, text.down.length) + 1;
  return (
    <g>
      <text className="tl num" x={right - width - 3} y={y} textAnchor="end">
        {text.median}
      </text>
      <text className="tl num" x={right} y={y - 4} textAnchor="end" style={{ fontSize: '10px' }}>
        {text.up}
      </text>
      <text className="tl num" x={right} y={y + 8} textAnchor="end" style={{ fontSize: '10px' }}>
        {text.down}
      </text>
    </g>
  );
}

/** Numbers and name below the lowest panel of a column, and the name beside the first panel of a row. */
function OuterNames({
  one,
  bottom,
  row,
}: {
  one: ShownParameter;
  bottom: PanelPlace;
  row: PanelPlace | null;
}): ReactNode {
  const m = one.marginal;
  const { toX } = panelScales(m.axis, m.axis, bottom);
  const ground = bottom.top + bottom.size;
  return (
    <g>
      {panelTicks(m, bottom.size).map((tick) => (
        <text key={tick.value} className="tl" x={toX(tick.value)} y={ground + 17} textAnchor="middle">
          {tick.label}
        </text>
      ))}
      <text className="at" x={bottom.left + bottom.size / 2} y={ground + 38} textAnchor="middle">
        <SvgSym {...one.parameter.symbol} />
      </text>
      {row ? (
        <text className="at" x={2} y={row.top + 12}>
          <SvgSym {...one.parameter.symbol} />
        </text>
      ) : null}
    </g>
  );
}

/** What the two regions hold; no box round it. */
function RegionKey({ right }: { right: number }) {
  const x = right - 154;
  return (
    <g>
      <path className="b68" d={`M${x} 32h30v14h-30z`} />
      <path className="c68" d={`M${x} 32h30v14h-30z`} />
      <text className="an" x={x + 40} y={44}>
        {'68\u202f% of the draws'}
      </text>
      <path className="b95" d={`M${x} 56h30v14h-30z`} />
      <path className="c95" d={`M${x} 56h30v14h-30z`} />
      <text className="an" x={x + 40} y={68}>
        {'95\u202f% of the draws'}
      </text>
    </g>
  );
}
