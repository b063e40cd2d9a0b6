'use client';

import { useCallback, useId, useMemo, useState, type KeyboardEvent, type PointerEvent } from 'react';
import { formatNumber, minus } from '@/lib/figures/format';
import { plain } from '../words/counts';
import { Figure, useNarrow, type FigureFacts } from './figure';
import { correlationAt, correlationMask, strength } from './correlation-image';

export interface CorrelationFigureProps extends FigureFacts {
  kappa: readonly number[];
  /** Below the diagonal, row by row. */
  values: readonly number[];
}

interface Cell {
  i: number;
  j: number;
}

const left = 66;
const top = 42;
/** Room for the tick labels and the name of the axis. */
const below = 49;
const side = { wide: 420, narrow: 259 };
const heights = { wide: top + side.wide + below, narrow: top + side.narrow + below };

const signed = (r: number, decimals = 3): string =>
  r > 0 ? `+${formatNumber(r, decimals)}` : formatNumber(r, decimals);

/** Bins that carry labels: the ends and a few between. */
function labelled(rows: number, narrow: boolean): number[] {
  const wished = Math.min(rows, narrow ? 3 : 5);
  if (wished < 2) return [0];
  return [...new Set(Array.from({ length: wished }, (_, t) => Math.round((t * (rows - 1)) / (wished - 1))))];
}

/** −1 to +1 as a strip of the two colours. */
function Legend({ x, width }: { x: number; width: number }) {
  const steps = 21;
  const step = width / steps;
  return (
    <g>
      {Array.from({ length: steps }, (_, t) => {
        const r = -1 + (2 * t) / (steps - 1);
        return (
          <rect
            key={t}
            className={r < 0 ? 'cor-neg' : 'cor-pos'}
            x={x + t * step}
            y={4}
            width={step + 0.3}
            height={10}
            opacity={strength(r)}
          />
        );
      })}
      {([-1, 0, 1] as const).map((r) => (
        <text key={r} className="tl" x={x + ((r + 1) / 2) * width} y={28} textAnchor="middle">
          {r < 0 ? `${minus}1` : r > 0 ? '+1' : '0'}
        </text>
      ))}
      <text className="an" x={x - 14} y={14} textAnchor="end">
        correlation
      </text>
    </g>
  );
}

function Ticks({ kappa, size, narrow }: { kappa: readonly number[]; size: number; narrow: boolean }) {
  const rows = kappa.length;
  const middle = (index: number) => ((index + 0.5) * size) / rows;
  return (
    <g>
      {labelled(rows, narrow).map((index) => (
        <g key={index}>
          <path className="tk" d={`M${left + middle(index)} ${top + size}v5`} />
          <text className="tl" x={left + middle(index)} y={top + size + 19} textAnchor="middle">
            {plain(kappa[index], 2)}
          </text>
          <path className="tk" d={`M${left} ${top + size - middle(index)}h-5`} />
          <text className="tl" x={left - 9} y={top + size - middle(index) + 4} textAnchor="end">
            {plain(kappa[index], 2)}
          </text>
        </g>
      ))}
      <text className="at it" x={left + size} y={top + size + 41} textAnchor="end">
        κ
      </text>
      <text className="at it" x={left - 46} y={top - 12}>
        κ
      </text>
    </g>
  );
}

const moves: Readonly<Record<string, readonly [number, number]>> = {
  ArrowLeft: [0, -1],
  ArrowRight: [0, 1],
  ArrowUp: [1, 0],
  ArrowDown: [-1, 0],
};

/**
 * A correlation matrix as an image of one pixel a pair of bins. The pair under the pointer is told above it; with the arrow
 * keys (Page keys by ten, Home and End to the ends of a row) every pair is reached and read out.
 */
export function CorrelationFigure({ kappa, values, ...facts }: CorrelationFigureProps) {
  const rows = kappa.length;
  const narrow = useNarrow();
  const size = narrow ? side.narrow : side.wide;
  const mask = useId().replace(/\W/g, '');
  const [cell, setCell] = useState<Cell | null>(null);
  const masks = useMemo(
    () =>
      typeof document === 'undefined'
        ? null
        : { positive: correlationMask(values, rows, 1), negative: correlationMask(values, rows, -1) },
    [values, rows],
  );
  // Kept the same while the pointer moves over the matrix: its table is made of a quarter of a million numbers.
  const numbers = useCallback(
    () => ({
      columns: ['kappa', ...kappa.map((_, j) => `r${j + 1}`)],
      rows: kappa.map((value, i) => [value, ...kappa.map((_, j) => correlationAt(values, i, j))]),
    }),
    [kappa, values],
  );
  const within = (index: number) => Math.max(0, Math.min(rows - 1, index));

  function point(event: PointerEvent<HTMLDivElement>) {
    const box = event.currentTarget.getBoundingClientRect();
    const j = within(Math.floor(((event.clientX - box.left) / box.width) * rows));
    const i = within(rows - 1 - Math.floor(((event.clientY - box.top) / box.height) * rows));
    setCell({ i, j });
  }

  function key(event: KeyboardEvent<HTMLDivElement>) {
    const { i, j } = cell ?? { i: 0, j: 0 };
    const step = moves[event.key];
    const next: Cell | null = step
      ? { i: within(i + step[0]), j: within(j + step[1]) }
      : event.key === 'PageUp'
        ? { i: within(i + 10), j }
        : event.key === 'PageDown'
          ? { i: within(i - 10), j }
          : event.key === 'Home'
            ? { i, j: 0 }
            : event.key === 'End'
              ? { i, j: rows - 1 }
              : null;
    if (!next) return;
    event.preventDefault();
    setCell(next);
  }

  const said = cell
    ? `Bins ${cell.i + 1} and ${cell.j + 1}, κ = ${plain(kappa[cell.i], 3)} and ${plain(kappa[cell.j], 3)}: correlation ${signed(correlationAt(values, cell.i, cell.j))}`
    : null;
  return (
    <Figure
      {...facts}
      height={heights.wide}
      heightNarrow={heights.narrow}
      numbers={numbers}
      above={
        <>
          <p
            aria-live="polite"
            className="mb-1 min-h-[21px] font-controls text-note text-ink-2 max-tablet:min-h-[42px]"
          >
            {said ??
              'Point at a pair of bins, or move over the matrix with the arrow keys, to read its number.'}
          </p>
          <div className="relative z-[1] h-0">
            {/* A grid of pairs under one key: a slider in two directions is what assistive technology calls an application. */}
            <div
              role="application"
              aria-label={`${facts.label}: arrow keys move from bin to bin`}
              tabIndex={0}
              className="absolute cursor-crosshair"
              style={{ left, top, width: size, height: size }}
              onPointerMove={point}
              onPointerDown={point}
              onPointerLeave={() => setCell(null)}
              onKeyDown={key}
              onFocus={(event) => {
                if (event.currentTarget.matches(':focus-visible')) setCell((now) => now ?? { i: 0, j: 0 });
              }}
              onBlur={() => setCell(null)}
            />
          </div>
        </>
      }
    >
      {({ width }) => (
        <svg width={width} height={narrow ? heights.narrow : heights.wide} aria-hidden="true">
          {masks
            ? (['positive', 'negative'] as const).map((sign) => (
                <g key={sign}>
                  <mask
                    id={`${mask}-${sign}`}
                    maskUnits="userSpaceOnUse"
                    x={left}
                    y={top}
                    width={size}
                    height={size}
                  >
                    <image
                      href={masks[sign]}
                      x={left}
                      y={top}
                      width={size}
                      height={size}
                      preserveAspectRatio="none"
                      style={{ imageRendering: 'pixelated' }}
                    />
                  </mask>
                  <rect
                    className={sign === 'positive' ? 'cor-pos' : 'cor-neg'}
                    x={left}
                    y={top}
                    width={size}
                    height={size}
                    mask={`url(#${mask}-${sign})`}
                  />
                </g>
              ))
            : null}
          <path className="ax" d={`M${left} ${top}V${top + size}H${left + size}`} />
          <Ticks kappa={kappa} size={size} narrow={narrow} />
          <Legend x={left + size - (narrow ? 112 : 168)} width={narrow ? 112 : 168} />
          {cell ? (
            <path
              className="car"
              d={`M${left} ${top + size - ((cell.i + 0.5) * size) / rows}H${left + size}M${left + ((cell.j + 0.5) * size) / rows} ${top}V${top + size}`}
            />
          ) : null}
        </svg>
      )}
    </Figure>
  );
}
