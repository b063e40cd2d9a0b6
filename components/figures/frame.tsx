import type { ReactNode } from 'react';
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

/** One axis with its ticks, inward: along x at the bottom, along y at the left. */
function Axis({ along, panel, ticks, place }: AxisProps) {
  const { left, right, top, bottom } = panel;
  const line = along === 'x' ? `M${left} ${bottom - 1}H${right}` : `M${left + 1} ${top}V${bottom}`;
  return (
    <>
      <path className="ax" d={line} />
      {ticks.map(({ value, major }) => {
        const at = place(value).toFixed(2);
        const size = major ? 6 : 3;
        const stroke = along === 'x' ? `M${at} ${bottom - 1}v${-size}` : `M${left + 1} ${at}h${size}`;
        return <path key={value} className="tk" d={stroke} />;
      })}
    </>
  );
}

interface AxisProps {
  along: 'x' | 'y';
  panel: Panel;
  ticks: readonly Tick[];
  /** From values to pixels along the axis. */
  place: (value: number) => number;
}

/** Left and bottom axis with ticks inward; names stand horizontally above and at the right end. */
export function Frame({ panel, yAxisId, xTicks, yTicks, xLabels = true, xName, yName }: FrameProps) {
  const pixels = usePixels(yAxisId);
  const { left, right, top, bottom } = panel;
  return (
    <g>
      <Axis along="x" panel={panel} ticks={xTicks} place={pixels.x} />
      <Axis along="y" panel={panel} ticks={yTicks} place={pixels.y} />
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
