'use client';

import { useMemo } from 'react';
import { Dot } from 'recharts';
import { Chart, usePixels, type ChartProps } from '@/components/figures/chart';
import { Figure, type FigureSize } from '@/components/figures/figure';
import { Frame, type Panel } from '@/components/figures/frame';
import { ZeroLine } from '@/components/figures/points-layers';
import { linearTicks, paddedDomain, type Tick } from '@/lib/figures/ticks';

export interface CountPoint {
  fields: number;
  /** ln of the Bayes factor and its standard error. */
  value: number;
  error: number;
}

const height = 238;

/** ln Bayes factor against the number of fields, with error bars. */
export function CountFigure({
  number,
  points,
  against,
}: {
  number: number;
  points: readonly CountPoint[];
  /** "no field", "the best" */
  against: string;
}) {
  return (
    <Figure
      number={number}
      caption={`Natural logarithm of the Bayes factor against ${against}, by the number of fields. Bars are one standard error; where none is seen it is smaller than the point.`}
      label={`ln Bayes factor against ${against} by the number of fields: ${points
        .map(({ fields, value }) => `${fields}: ${value.toFixed(1)}`)
        .join(', ')}`}
      fileName="bayes-factors"
      height={height}
      heightNarrow={height}
      numbers={() => ({
        columns: ['fields', 'ln_bayes_factor', 'standard_error'],
        rows: points.map(({ fields, value, error }) => [fields, value, error]),
      })}
    >
      {(size) => <Drawing points={points} size={size} />}
    </Figure>
  );
}

function Drawing({ points, size }: { points: readonly CountPoint[]; size: FigureSize }) {
  const most = Math.max(2, ...points.map(({ fields }) => fields));
  const yDomain = paddedDomain(
    points.flatMap(({ value, error }) => [value - error, value + error, 0]),
    0.1,
  );
  const panel: Panel = { left: size.narrow ? 44 : 52, right: size.width - 12, top: 32, bottom: 182 };
  const [low, high] = yDomain;
  const { left, right, top, bottom } = panel;
  const axes = useMemo(
    () =>
      ({
        x: { domain: [-0.5, most + 0.5], range: [left, right] },
        y: { main: { domain: [low, high], range: [bottom, top] } },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [most, low, high, left, right, top, bottom],
  );
  const xTicks: Tick[] = Array.from({ length: most + 1 }, (_, value) => ({
    value,
    label: String(value),
    major: true,
  }));
  return (
    <Chart width={size.width} height={height} {...axes}>
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={xTicks}
        yTicks={linearTicks(low, high, size.narrow ? 4 : 5)}
        xName="number of fields"
        yName="ln B"
      />
      <ZeroLine panel={panel} yAxisId="main" />
      <Bars points={points} />
    </Chart>
  );
}

function Bars({ points }: { points: readonly CountPoint[] }) {
  const pixels = usePixels('main');
  return points.map(({ fields, value, error }) => {
    const x = pixels.x(fields);
    return (
      <g key={fields}>
        <path
          className="err"
          d={`M${x.toFixed(1)} ${pixels.y(value + error).toFixed(1)}V${pixels.y(value - error).toFixed(1)}`}
        />
        <Dot className="pt" cx={x} cy={pixels.y(value)} r={3.4} />
      </g>
    );
  });
}
