'use client';

import { useMemo, type ReactNode } from 'react';
import { linePath } from '@/lib/figures/paths';
import { spread } from '@/lib/figures/spread';
import { logTicks } from '@/lib/figures/ticks';
import { Chart, usePixels, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';

export interface AccuracyLine {
  /** "two powers", and "two" where there is no room. */
  label: string;
  short: string;
  /** Column name in saved numbers. */
  name: string;
  /** Bias by cut; NaN where there is none. */
  bias: ArrayLike<number>;
  /** The background as it is set: drawn in ink. */
  own: boolean;
}

export interface AccuracyFigureProps extends FigureFacts {
  /** Upper end of every cut, ascending. */
  kappa: readonly number[];
  lines: readonly AccuracyLine[];
  /** The cut that is set. */
  cut: number;
  /** Shares at which hairlines run. */
  shares: readonly number[];
  above?: ReactNode;
}

/** Lowest bias that is drawn; below it a template is as good as exact. */
const floor = 1e-4;
const height = 287;

/** Bias of the amplitude by the highest κ that is kept, one line for every number of background powers. */
export function AccuracyFigure(props: AccuracyFigureProps) {
  const { kappa, lines } = props;
  return (
    <Figure
      {...props}
      height={height}
      heightNarrow={height}
      numbers={() => ({
        columns: ['kappa_max', ...lines.map(({ name }) => name)],
        rows: kappa.map((value, i) => [
          value,
          ...lines.map(({ bias }) => (Number.isFinite(bias[i]) ? bias[i] : null)),
        ]),
      })}
    >
      {(size) => <Drawing figure={props} size={size} />}
    </Figure>
  );
}

function Drawing({ figure, size }: { figure: AccuracyFigureProps; size: FigureSize }) {
  const { kappa, lines, cut, shares } = figure;
  const first = kappa[0];
  const last = kappa[kappa.length - 1];
  const panel = useMemo<Panel>(
    () => ({
      left: size.narrow ? 44 : 52,
      right: size.width - (size.narrow ? 44 : 92),
      top: 42,
      bottom: 231,
    }),
    [size.narrow, size.width],
  );
  const axes = useMemo(
    () =>
      ({
        x: { domain: [first, last], range: [panel.left, panel.right], scale: 'log' },
        y: { main: { domain: [floor, 1], range: [panel.bottom, panel.top], scale: 'log' } },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [first, last, panel],
  );
  return (
    <Chart width={size.width} height={height} {...axes}>
      <Levels shares={shares} panel={panel} />
      <Cut at={cut} panel={panel} />
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={logTicks(first, last, size.narrow ? 4 : 6)}
        yTicks={logTicks(floor, 1, 5)}
        xName={
          <>
            highest <tspan fontStyle="italic">κ</tspan> kept
          </>
        }
        yName="error of the amplitude"
      />
      <Lines kappa={kappa} lines={lines} panel={panel} narrow={size.narrow} />
    </Chart>
  );
}

/** Hairlines at the shares that matter. */
function Levels({ shares, panel }: { shares: readonly number[]; panel: Panel }) {
  const pixels = usePixels('main');
  return shares.map((share) => (
    <path key={share} className="zero" d={`M${panel.left} ${pixels.y(share).toFixed(1)}H${panel.right}`} />
  ));
}

function Cut({ at, panel }: { at: number; panel: Panel }) {
  const x = usePixels('main').x(at);
  return (
    <g>
      <path className="gap" d={`M${x.toFixed(1)} ${panel.top}V${panel.bottom}`} />
      <text
        className="an it"
        x={Math.min(x, panel.right)}
        y={panel.top - 10}
        textAnchor={x > panel.right - 30 ? 'end' : 'middle'}
      >
        as cut
      </text>
    </g>
  );
}

/** Every line inside the frame, its name at its last value. */
function Lines({
  kappa,
  lines,
  panel,
  narrow,
}: {
  kappa: readonly number[];
  lines: readonly AccuracyLine[];
  panel: Panel;
  narrow: boolean;
}) {
  const pixels = usePixels('main');
  const inside = (value: number) => Math.min(1, Math.max(floor, value));
  const drawn = lines.map((line) => {
    const seen = kappa.flatMap((_, i) => (Number.isFinite(line.bias[i]) ? [i] : []));
    return {
      ...line,
      x: seen.map((i) => pixels.x(kappa[i])),
      y: seen.map((i) => pixels.y(inside(line.bias[i]))),
    };
  });
  const labels = spread(
    drawn.map(({ y }) => y.at(-1) ?? panel.top),
    16,
  );
  // A crowd at the top or the bottom is moved inside as one.
  const above = Math.max(0, panel.top - Math.min(...labels));
  const below = Math.max(0, Math.max(...labels) - panel.bottom);
  return drawn.map(({ label, short, own, x, y }, k) =>
    x.length ? (
      <g key={label}>
        <path className={own ? 'sum' : 'lead'} d={linePath(x, y)} />
        <text className="an" x={panel.right + 8} y={labels[k] + above - below + 5}>
          {narrow ? short : label}
        </text>
      </g>
    ) : null,
  );
}
