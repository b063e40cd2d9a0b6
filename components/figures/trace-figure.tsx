'use client';

import { useMemo } from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';
import { spread } from '@/lib/figures/spread';
import { linePath, markerPath } from '@/lib/figures/paths';
import { thinnedIndices } from '@/lib/figures/thin';
import { linearTicks, paddedDomain } from '@/lib/figures/ticks';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Chart, usePixels, type ChartProps } from './chart';
import { Frame, type Panel } from './frame';
import { SvgSym } from './svg-text';

export interface Trace {
  symbol: { base: string; sub: string };
  /** 0-based field whose colour it takes; null for ink. */
  field: number | null;
  /** One array a replica, all of them values at the same draws. */
  replicas: readonly ArrayLike<number>[];
}

export interface TraceFigureProps extends FigureFacts {
  traces: readonly Trace[];
  /** Draws of warm-up, shaded. */
  warmup: number;
  /** Draws between two values; 1 unless told. */
  step?: number;
  /** Draws that the axis reaches to; left out, those that are there. */
  total?: number;
}

/** Masses in the replicas since the start: in their field's colour without dashes, labelled at the end. */
export function TraceFigure(props: TraceFigureProps) {
  return (
    <Figure {...props} height={273} heightNarrow={238} numbers={() => traceNumbers(props)}>
      {(size) => <TraceDrawing figure={props} size={size} />}
    </Figure>
  );
}

function traceNumbers({ traces, step = 1 }: TraceFigureProps): FigureNumbers {
  const length = Math.max(0, ...traces.flatMap((t) => t.replicas.map((r) => r.length)));
  const kept = thinnedIndices(new Float64Array(length), 1000);
  const columns = traces.flatMap((t) =>
    t.replicas.map((values, r) => ({ name: `${t.symbol.base}${t.symbol.sub} replica ${r}`, values })),
  );
  return {
    columns: ['draw', ...columns.map((c) => c.name)],
    rows: kept.map((i) => [i * step, ...columns.map((c) => c.values[i] ?? null)]),
  };
}

/** Draws and values of a trace for as many points as a screen can show. */
function thinned(values: ArrayLike<number>, points: number, step: number) {
  const kept = thinnedIndices(values, points);
  return { draws: kept.map((i) => i * step), y: kept.map((i) => values[i]) };
}

function TraceDrawing({ figure, size }: { figure: TraceFigureProps; size: FigureSize }) {
  const { traces, warmup, step = 1 } = figure;
  const panel: Panel = {
    left: size.narrow ? 36 : 44,
    // Room for the symbols at the end of the traces.
    right: size.width - 30,
    top: 30,
    bottom: size.narrow ? 190 : 226,
  };
  const lines = useMemo(
    () =>
      traces.flatMap((trace, t) =>
        trace.replicas.map((values, r) => ({
          key: `${t} ${r}`,
          className: `tr ${trace.field === null ? '' : `f${trace.field + 1}`}`,
          ...thinned(values, 2 * Math.max(100, size.width), step),
        })),
      ),
    [traces, step, size.width],
  );
  const yDomain = useMemo(() => paddedDomain(lines.flatMap((l) => l.y)), [lines]);
  const now = Math.max(0, ...traces.flatMap((t) => t.replicas.map((r) => (r.length - 1) * step)));
  const end = Math.max(figure.total ?? now, now, 1);
  const height = size.narrow ? 238 : 273;
  const { left, right, top, bottom } = panel;
  const axes = useMemo(
    () =>
      ({
        x: { domain: [0, end], range: [left, right] },
        y: { main: { domain: yDomain, range: [bottom, top] } },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [end, yDomain, left, right, top, bottom],
  );
  return (
    <Chart width={size.width} height={height} {...axes}>
      <WarmUp panel={panel} until={Math.min(warmup, end)} />
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={linearTicks(0, end, size.narrow ? 3 : 6).filter((tick) => tick.major)}
        yTicks={linearTicks(yDomain[0], yDomain[1], size.narrow ? 4 : 6).filter((tick) => tick.major)}
        xName="draw"
        yName={traces.map((trace, i) => (
          <tspan key={i}>
            {i ? ', ' : ''}
            <SvgSym {...trace.symbol} />
          </tspan>
        ))}
      />
      {lines.map((line) => (
        <TraceLine key={line.key} className={line.className} draws={line.draws} y={line.y} />
      ))}
      <TraceEnds panel={panel} traces={traces} now={now} running={now < end} />
    </Chart>
  );
}

/** One replica's trace as a path. */
function TraceLine({ className, draws, y }: { className: string; draws: number[]; y: number[] }) {
  const pixels = usePixels('main');
  return <path className={className} d={linePath(draws.map(pixels.x), y.map(pixels.y))} />;
}

function WarmUp({ panel, until }: { panel: Panel; until: number }) {
  const pixels = usePixels('main');
  if (!(until > 0)) return null;
  const width = pixels.x(until) - panel.left;
  return (
    <g>
      <rect
        className="b95"
        x={panel.left + 0.5}
        y={panel.top}
        width={Math.max(0, width)}
        height={panel.bottom - panel.top - 0.5}
      />
      {width > 120 ? (
        <text className="an it" x={panel.left + width} y={panel.top - 8} textAnchor="end">
          warm-up
        </text>
      ) : null}
    </g>
  );
}

/** A line at the present draw, and each trace's marker and symbol at the mean of its replicas there. */
function TraceEnds({
  panel,
  traces,
  now,
  running,
}: {
  panel: Panel;
  traces: readonly Trace[];
  now: number;
  running: boolean;
}) {
  const pixels = usePixels('main');
  if (now === 0) return null;
  const x = pixels.x(now);
  const ends = traces.map((trace) => {
    const last = trace.replicas.map((r) => r[r.length - 1]).filter(Number.isFinite);
    return pixels.y(last.reduce((sum, v) => sum + v, 0) / last.length);
  });
  const labels = spread(ends, 15);
  return (
    <g>
      {running ? <path className="lead" d={`M${x.toFixed(1)} ${panel.top}V${panel.bottom}`} /> : null}
      {traces.map((trace, i) =>
        Number.isFinite(ends[i]) ? (
          <g key={i}>
            <path
              className={`mk ${trace.field === null ? 'plain' : `f${trace.field + 1}`}`}
              d={markerPath(trace.field ?? 0, x, ends[i], 3.6)}
            />
            <text className="an strong" x={x + 9} y={labels[i] + 5}>
              <SvgSym {...trace.symbol} />
            </text>
          </g>
        ) : null,
      )}
    </g>
  );
}
