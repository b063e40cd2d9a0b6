import { useId, useMemo, type ReactNode } from 'react';
import {
  highestOf,
  jointPaths,
  marginalPaths,
  panelScales,
  type Joint,
  type Marginal,
  type PanelPlace,
} from '@/lib/figures/corner';
import { ringsPath } from '@/lib/figures/contour-paths';
import { linearTicks, type Tick } from '@/lib/figures/ticks';
import type { CornerParameter } from './corner-figure';
import type { FigureSize } from './figure';
import { SvgSym } from './svg-text';

export interface ShownParameter {
  parameter: CornerParameter;
  marginal: Marginal;
  text: { median: string; up: string; down: string };
  /** Value that was put in, where the data are simulated. */
  truth: number | null;
  /** The same parameter in samples laid over. */
  over: Marginal | null;
}

/** Joint regions of row r against column c, of the draws and of samples laid over. */
export interface ShownJoint {
  own: Joint;
  over: Joint | null;
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

export interface CornerDrawingProps {
  shown: readonly ShownParameter[];
  jointOf: (row: number, column: number) => ShownJoint;
  size: FigureSize;
  /** Name of the samples laid over. */
  overlay?: string;
}

export function CornerDrawing({ shown, jointOf, size, overlay }: CornerDrawingProps) {
  const count = shown.length;
  const place = places(count, size);
  const truths = shown.some(({ truth }) => truth !== null);
  return (
    <svg width={size.width} height={cornerHeight(count, size)} aria-hidden="true">
      {shown.map((row, r) =>
        shown
          .slice(0, r)
          .map((column, c) => (
            <JointPanel
              key={`${row.parameter.name} ${column.parameter.name}`}
              x={column}
              y={row}
              joint={jointOf(r, c)}
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
      {count > 1 ? (
        <RegionKey right={size.width - (size.narrow ? 0 : 10)} truths={truths} overlay={overlay} />
      ) : null}
    </svg>
  );
}

interface JointPanelProps {
  x: ShownParameter;
  y: ShownParameter;
  joint: ShownJoint;
  place: PanelPlace;
  /** Leftmost of its row: the vertical axis has its numbers; on a phone none beside the name. */
  labelled: boolean;
}

function JointPanel({ x: column, y: row, joint: { own, over }, place, labelled }: JointPanelProps) {
  const clip = useId();
  const { left, top: upper, size: side } = place;
  const { axis: ax } = column.marginal;
  const { axis: ay } = row.marginal;
  const paths = useMemo(
    () => jointPaths(ax, ay, own, { left, top: upper, size: side }),
    [ax, ay, own, left, upper, side],
  );
  const { toX, toY } = panelScales(ax, ay, place);
  return (
    <g>
      <path className="dots" d={paths.dots} />
      <path className="b95" d={paths.outer} />
      <path className="b68" d={paths.inner} />
      <path className="c95" d={paths.outer} />
      <path className="c68" d={paths.inner} />
      {over || column.truth !== null || row.truth !== null ? (
        <clipPath id={clip}>
          <rect x={left} y={upper} width={side} height={side} />
        </clipPath>
      ) : null}
      {over ? (
        <g clipPath={`url(#${clip})`}>
          {over.regions.map((rings, i) => (
            <path key={i} className={i ? 'over wide' : 'over'} d={ringsPath(rings, toX, toY)} />
          ))}
        </g>
      ) : null}
      <g clipPath={`url(#${clip})`}>
        {column.truth === null ? null : (
          <path className="truth" d={`M${toX(column.truth).toFixed(1)} ${upper}v${side}`} />
        )}
        {row.truth === null ? null : (
          <path className="truth" d={`M${left} ${toY(row.truth).toFixed(1)}h${side}`} />
        )}
      </g>
      <path className="ax" d={`M${left} ${upper}v${side}h${side}`} />
      {panelTicks(column.marginal, side).map((tick) => (
        <path key={`x${tick.value}`} className="tk" d={`M${toX(tick.value).toFixed(1)} ${upper + side}v-4`} />
      ))}
      {panelTicks(row.marginal, side).map((tick) => (
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
  const clip = useId();
  const { left, top: upper, size: side } = place;
  const { parameter, marginal: m, text, truth, over } = one;
  const { paths, laid } = useMemo(() => {
    const at = { left, top: upper, size: side };
    const highest = Math.max(highestOf(m), over ? highestOf(over) : 0);
    return {
      paths: marginalPaths(m, at, m.axis, highest),
      laid: over ? marginalPaths(over, at, m.axis, highest).line : null,
    };
  }, [m, over, left, upper, side]);
  const { toX } = panelScales(m.axis, m.axis, place);
  const right = left + side;
  return (
    <g>
      <path className="b68" d={paths.area} />
      <path className={parameter.field === null ? 'sum' : `ln f${parameter.field + 1}`} d={paths.line} />
      <path className="lead" d={paths.median} />
      {laid || truth !== null ? (
        <>
          <clipPath id={clip}>
            <rect x={left} y={upper} width={side} height={side} />
          </clipPath>
          <g clipPath={`url(#${clip})`}>
            {laid ? <path className="over" d={laid} /> : null}
            {truth === null ? null : (
              <path className="truth" d={`M${toX(truth).toFixed(1)} ${upper}v${side}`} />
            )}
          </g>
        </>
      ) : null}
      <path className="ax" d={`M${left} ${upper + side}h${side}`} />
      {panelTicks(m, side).map((tick) => (
        <path key={tick.value} className="tk" d={`M${toX(tick.value).toFixed(1)} ${upper + side}v-4`} />
      ))}
      {medianWidth(text) + 26 < side ? (
        <text className="at" x={left + 2} y={upper - 9}>
          <SvgSym {...parameter.symbol} />
        </text>
      ) : null}
      <MedianText right={right} y={upper - 9} text={text} />
    </g>
  );
}

/** Width of the median with its ends in pixels; the face is monospaced, 0.6 em a character. */
function medianWidth({ median, up, down }: ShownParameter['text']): number {
  return 7.2 * median.length + 6 * Math.max(up.length, down.length) + 4;
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

/** What regions and lines are; no box round it. */
function RegionKey({ right, truths, overlay }: { right: number; truths: boolean; overlay?: string }) {
  const rows = [
    { line: '', marks: ['b68', 'c68'], words: '68\u202f% of the draws' },
    { line: '', marks: ['b95', 'c95'], words: '95\u202f% of the draws' },
    ...(truths ? [{ line: 'truth', marks: null, words: 'put in' }] : []),
    ...(overlay ? [{ line: 'over', marks: null, words: overlay }] : []),
  ];
  const x = right - 154;
  return (
    <g>
      {rows.map((row, i) => {
        const middle = 39 + 24 * i;
        return (
          <g key={row.words}>
            {row.marks ? (
              row.marks.map((mark) => (
                <path key={mark} className={mark} d={`M${x} ${middle - 7}h30v14h-30z`} />
              ))
            ) : (
              <path className={row.line} d={`M${x} ${middle}h30`} />
            )}
            <text className="an" x={x + 40} y={middle + 5}>
              {row.words}
            </text>
          </g>
        );
      })}
    </g>
  );
}
