import type { ReactNode } from 'react';
import { CartesianAxis } from 'recharts';
import type { Tick } from '@/lib/figures/ticks';
import { usePixels } from './chart';

/** A panel's place in pixels. */
export interface Panel {
  left: number;
  right: number;
  top: number;
  bottom: number;
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

/** All ticks are drawn as given, inward; their labels stand further out, in our own face. */
const inward = {
  mirror: true,
  interval: 0,
  tick: false,
  axisLine: { className: 'ax' },
  tickLine: { className: 'tk' },
} as const;

const placed = (ticks: readonly Tick[], toPixels: (value: number) => number) =>
  ticks.map(({ value, major }, index) => ({
    value,
    index,
    coordinate: toPixels(value),
    tickSize: major ? 6 : 3,
  }));

/** Left and bottom axis with ticks inward; names stand horizontally above and at the right end. */
export function Frame({ panel, yAxisId, xTicks, yTicks, xLabels = true, xName, yName }: FrameProps) {
  const pixels = usePixels(yAxisId);
  const { left, right, top, bottom } = panel;
  return (
    <g>
      <CartesianAxis
        {...inward}
        orientation="bottom"
        x={left}
        y={bottom - 1}
        width={right - left}
        height={1}
        viewBox={{ x: left, y: top, width: right - left, height: bottom - top }}
        ticks={placed(xTicks, pixels.x)}
      />
      <CartesianAxis
        {...inward}
        orientation="left"
        x={left}
        y={top}
        width={1}
        height={bottom - top}
        viewBox={{ x: left, y: top, width: right - left, height: bottom - top }}
        ticks={placed(yTicks, pixels.y)}
      />
      {xTicks.map((tick) =>
        xLabels && tick.major ? (
          <text
            key={`x${tick.value}`}
            className="tl"
            x={pixels.x(tick.value)}
            y={bottom + 18}
            textAnchor="middle"
          >
            {tick.label}
          </text>
        ) : null,
      )}
      {yTicks.map((tick) =>
        tick.major ? (
          <text
            key={`y${tick.value}`}
            className="tl"
            x={left - 8}
            y={pixels.y(tick.value) + 4}
            textAnchor="end"
          >
            {tick.label}
          </text>
        ) : null,
      )}
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
