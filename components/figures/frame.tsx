import type { ReactNode } from 'react';
import { useXAxisScale, useYAxisScale } from 'recharts';
import type { Tick } from '@/lib/figures/ticks';

/** A panel's place in pixels. */
export interface Panel {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** Scales of the surrounding chart; null until the chart has laid itself out. */
export function usePixels(yAxisId: string): { x: (v: number) => number; y: (v: number) => number } | null {
  const x = useXAxisScale();
  const y = useYAxisScale(yAxisId);
  if (!x || !y) return null;
  return { x: (v) => x(v) ?? NaN, y: (v) => y(v) ?? NaN };
}

export interface FrameProps {
  panel: Panel;
  yAxisId: string;
  xTicks: readonly Tick[];
  yTicks: readonly Tick[];
  /** Labels below the horizontal axis; left out of an upper panel that shares its axis. */
  xLabels?: boolean;
  xName?: ReactNode;
  yName?: ReactNode;
}

/** Left and bottom axis with ticks inward; names stand horizontally above and at the right end. */
export function Frame({ panel, yAxisId, xTicks, yTicks, xLabels = true, xName, yName }: FrameProps) {
  const pixels = usePixels(yAxisId);
  const { left, right, top, bottom } = panel;
  return (
    <g>
      <path className="ax" d={`M${left} ${top}V${bottom}H${right}`} />
      {pixels
        ? xTicks.map((tick) => (
            <g key={`x${tick.value}`}>
              <path
                className="tk"
                d={`M${pixels.x(tick.value).toFixed(1)} ${bottom}v${tick.major ? -6 : -3}`}
              />
              {xLabels && tick.major ? (
                <text className="tl" x={pixels.x(tick.value)} y={bottom + 18} textAnchor="middle">
                  {tick.label}
                </text>
              ) : null}
            </g>
          ))
        : null}
      {pixels
        ? yTicks.map((tick) => (
            <g key={`y${tick.value}`}>
              <path className="tk" d={`M${left} ${pixels.y(tick.value).toFixed(1)}h${tick.major ? 6 : 3}`} />
              {tick.major ? (
                <text className="tl" x={left - 8} y={pixels.y(tick.value) + 4} textAnchor="end">
                  {tick.label}
                </text>
              ) : null}
            </g>
          ))
        : null}
      {yName ? (
        <text className="at" x={left - 2} y={top - 12}>
          {yName}
        </text>
      ) : null}
      {xName ? (
        <text className="at" x={right} y={bottom + 38} textAnchor="end">
          {xName}
        </text>
      ) : null}
    </g>
  );
}
