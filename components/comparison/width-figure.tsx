'use client';

import { useMemo } from 'react';
import { Chart, usePixels, type ChartProps } from '@/components/figures/chart';
import { Figure, type FigureSize } from '@/components/figures/figure';
import { Frame, type Panel } from '@/components/figures/frame';
import { ZeroLine } from '@/components/figures/points-layers';
import { markerPath, linePath } from '@/lib/figures/paths';
import { spread } from '@/lib/figures/spread';
import { linearTicks, logTicks, paddedDomain } from '@/lib/figures/ticks';

export interface WidthLine {
  /** "one field" */
  label: string;
  fields: number;
  /** The notebook's own width. */
  sd: number;
  /** ln Bayes factor at rising widths, NaN where there is no value. */
  points: readonly { sd: number; value: number; error: number }[];
}

export interface WidthFigureProps {
  number: number;
  lines: readonly WidthLine[];
  /** "the amplitudes", "g" */
  of: string;
  /** What the Bayes factors are against. */
  against: string;
}

const height = 259;

/** ln Bayes factor against the width of the prior of the amplitudes, the notebook's own width marked. */
export function WidthFigure({ number, lines, of, against }: WidthFigureProps) {
  return (
    <Figure
      number={number}
      caption={`ln Bayes factor against ${against}, by the standard deviation of the normal prior of ${of}; the width that is set is marked. Bars are one standard error.`}
      label={`ln Bayes factor by the width of the prior of ${of}, for ${lines.map(({ label }) => label).join(' and ')}`}
      fileName="prior-widths"
      height={height}
      heightNarrow={height}
      numbers={() => ({
        columns: ['fields', 'prior_sd', 'ln_bayes_factor', 'standard_error'],
        rows: lines.flatMap(({ fields, points }) =>
          points.map(({ sd, value, error }) => [
            fields,
            sd,
            Number.isFinite(value) ? value : null,
            Number.isFinite(error) ? error : null,
          ]),
        ),
      })}
    >
      {(size) => <Drawing lines={lines} of={of} size={size} />}
    </Figure>
  );
}

function Drawing({ lines, of, size }: Pick<WidthFigureProps, 'lines' | 'of'> & { size: FigureSize }) {
  const widths = lines.flatMap(({ points }) => points.map(({ sd }) => sd));
  const [first, last] = [Math.min(...widths), Math.max(...widths)];
  const [low, high] = paddedDomain(
    lines.flatMap(({ points }) =>
      points
        .flatMap(({ value, error }) => [value - (error || 0), value + (error || 0)])
        .filter(Number.isFinite),
    ),
  );
  const panel: Panel = {
    left: size.narrow ? 44 : 52,
    right: size.width - 84,
    top: 32,
    bottom: 203,
  };
  const { left, right, top, bottom } = panel;
  const axes = useMemo(
    () =>
      ({
        x: { domain: [first, last], range: [left, right], scale: 'log' },
        y: { main: { domain: [low, high], range: [bottom, top] } },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [first, last, low, high, left, right, top, bottom],
  );
  return (
    <Chart width={size.width} height={height} {...axes}>
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={logTicks(first, last, size.narrow ? 4 : 5)}
        yTicks={linearTicks(low, high, size.narrow ? 4 : 5)}
        xName={`prior sd of ${of}`}
        yName="ln B"
      />
      <ZeroLine panel={panel} yAxisId="main" />
      <Own sd={lines[0].sd} panel={panel} />
      <Lines lines={lines} />
    </Chart>
  );
}

/** The width that is set. */
function Own({ sd, panel }: { sd: number; panel: Panel }) {
  const x = usePixels('main').x(sd);
  return (
    <g>
      <path className="gap" d={`M${x.toFixed(1)} ${panel.top}V${panel.bottom}`} />
      <text className="an it" x={x} y={panel.top - 8} textAnchor="middle">
        as set
      </text>
    </g>
  );
}

/** Each curve with its bars, and its marker and name at its last value. */
function Lines({ lines }: { lines: readonly WidthLine[] }) {
  const pixels = usePixels('main');
  const ends = lines.map(({ points }) => points.findLast(({ value }) => Number.isFinite(value)) ?? points[0]);
  const labels = spread(
    ends.map(({ value }) => pixels.y(value)),
    16,
  );
  return lines.map(({ label, fields, points }, i) => (
    <g key={fields}>
      <path
        className={`ln f${fields}`}
        d={linePath(
          points.map(({ sd }) => pixels.x(sd)),
          points.map(({ value }) => pixels.y(value)),
        )}
      />
      {points.map(({ sd, value, error }) =>
        Number.isFinite(value) && error > 0 ? (
          <path
            key={sd}
            className="err"
            d={`M${pixels.x(sd).toFixed(1)} ${pixels.y(value + error).toFixed(1)}V${pixels.y(value - error).toFixed(1)}`}
          />
        ) : null,
      )}
      {Number.isFinite(ends[i].value) ? (
        <>
          <path
            className={`mk f${fields}`}
            d={markerPath(fields - 1, pixels.x(ends[i].sd), pixels.y(ends[i].value), 3.6)}
          />
          <text className="an" x={pixels.x(ends[i].sd) + 9} y={labels[i] + 5}>
            {label}
          </text>
        </>
      ) : null}
    </g>
  ));
}
