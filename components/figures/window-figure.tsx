'use client';

import { useMemo } from 'react';
import { linePath } from '@/lib/figures/paths';
import { linearTicks } from '@/lib/figures/ticks';
import { Chart, usePixels, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';

export interface WindowFigureProps extends FigureFacts {
  /** Frequencies from 0, ascending, and the window's power there, 1 at 0. */
  mu: ArrayLike<number>;
  power: ArrayLike<number>;
  /** Frequencies that these bins see: shaded. */
  reach: readonly [number, number];
  /** Frequencies that the priors or the scan ask for, as a bar above the frame. */
  asked: readonly [number, number] | null;
  /** Where the window comes back to its height at 0. */
  alias: number;
}

/** The spectral window of the bins, the frequencies in reach, and where aliases lie. No value of a measurement is in it. */
export function WindowFigure(props: WindowFigureProps) {
  return (
    <Figure
      {...props}
      height={273}
      heightNarrow={252}
      numbers={() => ({
        columns: ['mu', 'power'],
        rows: Array.from(props.mu, (mu, i) => [mu, props.power[i]]),
      })}
    >
      {(size) => <WindowDrawing figure={props} size={size} />}
    </Figure>
  );
}

function WindowDrawing({ figure, size }: { figure: WindowFigureProps; size: FigureSize }) {
  const { mu, power } = figure;
  const last = mu[mu.length - 1];
  const panel = useMemo<Panel>(
    () => ({
      left: size.narrow ? 36 : 44,
      right: size.width - 8,
      top: 58,
      bottom: size.narrow ? 203 : 224,
    }),
    [size.narrow, size.width],
  );
  const x = useMemo(
    () => ({ domain: [0, last], range: [panel.left, panel.right] }) as ChartProps['x'],
    [last, panel],
  );
  const y = useMemo(
    () => ({ main: { domain: [0, 1.04], range: [panel.bottom, panel.top] } }) as ChartProps['y'],
    [panel],
  );
  return (
    <Chart width={size.width} height={size.narrow ? 252 : 273} x={x} y={y}>
      <Reach figure={figure} panel={panel} />
      <WindowLine mu={mu} power={power} />
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={linearTicks(0, last, size.narrow ? 4 : 8)}
        yTicks={linearTicks(0, 1.04, 5)}
        xName={<tspan fontStyle="italic">μ</tspan>}
      />
      <text className="at" x={panel.left - (size.narrow ? 28 : 36)} y={16}>
        power of one tone
      </text>
    </Chart>
  );
}

function WindowLine({ mu, power }: { mu: ArrayLike<number>; power: ArrayLike<number> }) {
  const pixels = usePixels('main');
  return <path className="sum" d={linePath(Array.from(mu, pixels.x), Array.from(power, pixels.y))} />;
}

/** Shading of the frequencies in reach, the bar of those that are asked for, and the alias line, each with its word. */
function Reach({ figure: { reach, asked, alias, mu }, panel }: { figure: WindowFigureProps; panel: Panel }) {
  const pixels = usePixels('main');
  const last = mu[mu.length - 1];
  const [from, to] = reach.map((value) => pixels.x(Math.min(value, last)));
  const bar = asked && asked.map((value) => pixels.x(Math.min(value, last)));
  const at = pixels.x(alias);
  const roomy = to - from > 70;
  return (
    <g>
      {to > from ? (
        <>
          <rect
            className="b95"
            x={from}
            y={panel.top}
            width={to - from}
            height={panel.bottom - panel.top - 0.5}
          />
          {roomy ? (
            <text className="an it" x={(from + to) / 2} y={panel.top + 20} textAnchor="middle">
              in reach
            </text>
          ) : null}
        </>
      ) : null}
      {bar ? (
        <>
          <path
            className="sum"
            d={`M${bar[0].toFixed(1)} ${panel.top - 14}v8M${bar[0].toFixed(1)} ${panel.top - 10}H${bar[1].toFixed(1)}M${bar[1].toFixed(1)} ${panel.top - 14}v8`}
          />
          <text className="an" x={(bar[0] + bar[1]) / 2} y={panel.top - 19} textAnchor="middle">
            asked for
          </text>
        </>
      ) : null}
      {alias <= last ? (
        <>
          <path className="lead" d={`M${at.toFixed(1)} ${panel.top}V${panel.bottom}`} />
          <text className="an it" x={at - 7} y={panel.top + 20} textAnchor="end">
            alias of 0
          </text>
        </>
      ) : null}
    </g>
  );
}
