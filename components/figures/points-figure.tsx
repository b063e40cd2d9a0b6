'use client';

import { memo, useId, useMemo, type ReactNode } from 'react';
import { Area, ComposedChart, Scatter, XAxis, YAxis } from 'recharts';
import { linearTicks, logTicks } from '@/lib/figures/ticks';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame } from './frame';
import { Key, type KeyEntry } from './key';
import { CurveLine, Flags, PointShape, ResidualGround, Residuals, ZeroLine } from './points-layers';
import { classOf, kappaDomain, keyEntries, placePanels, valueDomain } from './points-layout';
import { pointsNumbers } from './points-numbers';
import { KappaName, ShapeName } from './svg-text';

export interface MeasuredPoints {
  kappa: ArrayLike<number>;
  value: ArrayLike<number>;
  /** Standard errors, in the unit of the value. */
  error: ArrayLike<number>;
  /** Edges of the bins, where there are any; they set the ends of the axis. */
  lo?: ArrayLike<number>;
  hi?: ArrayLike<number>;
  /** Points that are framed, with a word beside them: {index: 12, word: 'row 13'}. */
  flags?: readonly { index: number; word: string }[];
  /** Places without a point: {kappa: 0.11, word: 'row 32: no number'}. */
  gaps?: readonly { kappa: number; word: string }[];
}

export interface Curve {
  role: 'sum' | 'field' | 'background' | 'envelope' | 'best';
  /** Name in the key. */
  label: string;
  kappa: ArrayLike<number>;
  y: ArrayLike<number>;
  /** Lower half of an envelope. */
  yLow?: ArrayLike<number>;
  /** 0-based, for the role of a field. */
  field?: number;
}

export interface Band {
  kappa: ArrayLike<number>;
  lo95: ArrayLike<number>;
  lo68: ArrayLike<number>;
  hi68: ArrayLike<number>;
  hi95: ArrayLike<number>;
  /** "68 and 95 % of the prior's draws" */
  label?: string;
}

export interface PointsFigureProps extends FigureFacts {
  points?: MeasuredPoints;
  curves?: readonly Curve[];
  band?: Band;
  /** Residuals of the points in standard deviations, in the order of the points. */
  residuals?: ArrayLike<number>;
  xDomain?: readonly [number, number];
  yDomain?: readonly [number, number];
  yName?: ReactNode;
}

/** Fills come from the class of the group round a band, so the chart's own defaults give way. */
const still = {
  isAnimationActive: false,
  legendType: 'none',
  dot: false,
  activeDot: false,
  stroke: 'inherit',
  strokeWidth: 'inherit',
  fill: 'inherit',
} as const;

/** From the back to the front, whatever order the key has. */
const depth: readonly Curve['role'][] = ['envelope', 'background', 'field', 'best', 'sum'];

/** Measured points with errors on log κ; curves, a band, and residuals below on the same axis. */
export function PointsFigure(props: PointsFigureProps) {
  const keys = keyEntries(props);
  const height = (size: FigureSize) => placePanels(keys, props.residuals !== undefined, size).height;
  return (
    <Figure
      {...props}
      height={height({ width: 720, narrow: false })}
      heightNarrow={height({ width: 350, narrow: true })}
      numbers={() => pointsNumbers(props)}
    >
      {(size) => <PointsDrawing figure={props} size={size} keys={keys} />}
    </Figure>
  );
}

/**
 * The same object for as long as its content stays the same. A chart lays everything out anew when it is handed a new
 * object, and curves that follow a slider have no time for that.
 */
function useSettled<T>(value: T): T {
  const content = JSON.stringify(value);
  return useMemo(() => JSON.parse(content) as T, [content]);
}

interface DrawingProps {
  figure: PointsFigureProps;
  size: FigureSize;
  keys: KeyEntry[];
}

function PointsDrawing({ figure, size, keys }: DrawingProps) {
  const { points, curves = [], band, residuals } = figure;
  const clip = useId();
  const places = useSettled(placePanels(keys, residuals !== undefined, size));
  const xDomain = useSettled(kappaDomain(figure));
  const yDomain = useSettled(valueDomain(figure));
  const { main, residual, height } = places;
  const margin = useMemo(
    () => ({
      left: main.left,
      right: size.width - main.right,
      top: main.top,
      bottom: height - (residual ?? main).bottom,
    }),
    [main, residual, height, size.width],
  );
  return (
    <ComposedChart width={size.width} height={height} accessibilityLayer={false} margin={margin}>
      <Ground
        points={points}
        band={band}
        places={places}
        xDomain={xDomain}
        yDomain={yDomain}
        narrow={size.narrow}
        clip={clip}
        yName={figure.yName}
      />
      {[...curves]
        .sort((a, b) => depth.indexOf(a.role) - depth.indexOf(b.role))
        .flatMap((curve) =>
          [curve.y, curve.yLow].map((y, half) =>
            y ? (
              <CurveLine
                key={`${curve.label} ${half}`}
                className={`${classOf(curve)}${curves.length > 2 && curve.role === 'field' ? ' thin' : ''}`}
                kappa={curve.kappa}
                y={y}
                clip={clip}
              />
            ) : null,
          ),
        )}
      {residual && residuals && points ? (
        <Residuals panel={residual} kappa={points.kappa} residuals={residuals} />
      ) : null}
      <Key entries={keys} from={places.keyFrom} to={main.right} y={size.narrow ? 11 : 27} />
    </ComposedChart>
  );
}

interface GroundProps {
  points?: MeasuredPoints;
  band?: Band;
  places: ReturnType<typeof placePanels>;
  xDomain: [number, number];
  yDomain: [number, number];
  narrow: boolean;
  clip: string;
  yName?: ReactNode;
}

const residualDomain: [number, number] = [-3, 3];

/** All that stands still while curves move: axes, frames, band and points. */
const Ground = memo(function Ground(props: GroundProps) {
  const { points, band, places, xDomain, yDomain, narrow, clip, yName } = props;
  const { main, residual } = places;
  const xTicks = logTicks(xDomain[0], xDomain[1], narrow ? 4 : 5);
  const drawn = Array.from(points?.kappa ?? [], (x, i) => ({
    x,
    y: points?.value[i],
    error: points?.error[i],
    i,
  }));
  const bands = Array.from(band?.kappa ?? [], (x, i) => ({
    x,
    b95: [band?.lo95[i], band?.hi95[i]],
    b68: [band?.lo68[i], band?.hi68[i]],
  }));
  return (
    <>
      <defs>
        <clipPath id={clip}>
          <rect x={main.left} y={main.top} width={main.right - main.left} height={main.bottom - main.top} />
        </clipPath>
      </defs>
      <XAxis dataKey="x" type="number" scale="log" domain={xDomain} allowDataOverflow hide />
      <YAxis
        yAxisId="main"
        type="number"
        domain={yDomain}
        padding={{ bottom: (residual ?? main).bottom - main.bottom }}
        allowDataOverflow
        hide
      />
      {bands.length
        ? (['b95', 'b68'] as const).map((key) => (
            <Area
              key={key}
              {...still}
              zIndex={-1}
              yAxisId="main"
              clipPath={`url(#${clip})`}
              data={bands}
              dataKey={key}
              className={key}
              fillOpacity={1}
            />
          ))
        : null}
      <Frame
        panel={main}
        yAxisId="main"
        xTicks={xTicks}
        yTicks={linearTicks(yDomain[0], yDomain[1], narrow ? 4 : 6)}
        xLabels={!residual}
        xName={residual ? undefined : <KappaName />}
        yName={yName ?? <ShapeName />}
      />
      <ZeroLine panel={main} yAxisId="main" />
      {drawn.length ? (
        <Scatter
          isAnimationActive={false}
          legendType="none"
          yAxisId="main"
          data={drawn}
          dataKey="y"
          shape={<PointShape panel={main} yAxisId="main" />}
        />
      ) : null}
      {points ? <Flags points={points} panel={main} /> : null}
      {residual ? (
        <>
          <YAxis
            yAxisId="residual"
            type="number"
            domain={residualDomain}
            padding={{ top: residual.top - main.top }}
            allowDataOverflow
            hide
          />
          <ResidualGround panel={residual} xTicks={xTicks} />
        </>
      ) : null}
    </>
  );
});
