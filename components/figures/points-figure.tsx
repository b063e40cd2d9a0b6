'use client';

import { memo, useId, useMemo, type ReactNode } from 'react';
import { linearTicks, logTicks } from '@/lib/figures/ticks';
import { Chart, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame } from './frame';
import { Key, type KeyEntry } from './key';
import { BandAreas, CurveLine, Flags, Points, ResidualGround, Residuals, ZeroLine } from './points-layers';
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
  /** Points that are shown and not used, with the reason why: drawn hollow. */
  hollow?: readonly { index: number; reason: string }[];
  /** Places without a point: {kappa: 0.11, word: 'row 32: no number'}. */
  gaps?: readonly { kappa: number; word: string }[];
}

export interface Curve {
  role: 'sum' | 'field' | 'background' | 'envelope' | 'best' | 'over';
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
  /** Called with the index of a point that was clicked; keep it the same function while curves move. */
  onPick?: (index: number) => void;
}

/** From the back to the front, whatever order the key has. */
const depth: readonly Curve['role'][] = ['envelope', 'background', 'field', 'best', 'sum', 'over'];

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
  const axes = useMemo(
    () =>
      ({
        x: { domain: xDomain, range: [main.left, main.right], scale: 'log' },
        y: {
          main: { domain: yDomain, range: [main.bottom, main.top] },
          ...(residual
            ? { residual: { domain: residualDomain, range: [residual.bottom, residual.top] } }
            : {}),
        },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [main, residual, xDomain, yDomain],
  );
  return (
    <Chart width={size.width} height={height} {...axes}>
      <Ground
        points={points}
        band={band}
        places={places}
        xDomain={xDomain}
        yDomain={yDomain}
        narrow={size.narrow}
        clip={clip}
        yName={figure.yName}
        onPick={figure.onPick}
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
    </Chart>
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
  onPick?: (index: number) => void;
}

const residualDomain: [number, number] = [-3, 3];

/** All that stands still while curves move: axes, frames, band and points. */
const Ground = memo(function Ground(props: GroundProps) {
  const { points, band, places, xDomain, yDomain, narrow, clip, yName, onPick } = props;
  const { main, residual } = places;
  const xTicks = logTicks(xDomain[0], xDomain[1], narrow ? 4 : 5);
  return (
    <>
      <defs>
        <clipPath id={clip}>
          <rect x={main.left} y={main.top} width={main.right - main.left} height={main.bottom - main.top} />
        </clipPath>
      </defs>
      {band ? <BandAreas band={band} clip={clip} /> : null}
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
      {points ? <Points points={points} panel={main} onPick={onPick} /> : null}
      {points ? <Flags points={points} panel={main} /> : null}
      {residual ? <ResidualGround panel={residual} xTicks={xTicks} /> : null}
    </>
  );
});
