'use client';

import { useId, useMemo, type ReactNode } from 'react';
import { Area, ComposedChart, Line, Scatter, XAxis, YAxis } from 'recharts';
import { linearTicks, logTicks, paddedDomain } from '@/lib/figures/ticks';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';
import { Key, placeKey, type KeyEntry } from './key';
import { Flags, PointShape, ResidualPanel, ZeroLine, type DrawnPoint } from './points-layers';
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

const lineClass = {
  sum: 'sum',
  best: 'sum',
  background: 'bg',
  envelope: 'env',
} as const;

function classOf(curve: Curve): string {
  return curve.role === 'field' ? `ln f${(curve.field ?? 0) + 1}` : lineClass[curve.role];
}

/** Ends of the axis: the outer edges of the bins, else a little more than the points or curves reach. */
function kappaDomain({ xDomain, points, curves = [], band }: PointsFigureProps): [number, number] {
  if (xDomain) return [xDomain[0], xDomain[1]];
  const first = points?.lo?.[0];
  const last = points?.hi?.[points.hi.length - 1];
  if (first !== undefined && last !== undefined && first > 0) return [first, last];
  const kappas = [points?.kappa ?? [], ...curves.map((c) => c.kappa), band?.kappa ?? []].flatMap((k) =>
    Array.from(k),
  );
  const positive = kappas.filter((k) => k > 0);
  if (!positive.length) return [0.001, 1];
  const [lo, hi] = [Math.min(...positive), Math.max(...positive)];
  return points ? [lo / 1.06, hi * 1.06] : [lo, hi];
}

/** Ends of the vertical axis: from the points with their errors alone, so that it stands still while curves move. */
function valueDomain({ yDomain, points, curves = [], band }: PointsFigureProps): [number, number] {
  if (yDomain) return [yDomain[0], yDomain[1]];
  const { value = [], error = [] } = points ?? {};
  const ends = Array.from(value).flatMap((v, i) => [v - error[i], v + error[i]]);
  if (ends.some(Number.isFinite)) return paddedDomain(ends, 0.1);
  const drawn = band ? [band.lo95, band.hi95] : curves.map((c) => c.y);
  return paddedDomain(drawn.flatMap((y) => Array.from(y)));
}

/** Where things stand at a given size; the key's rows push the panels down. */
function layout(props: PointsFigureProps, keys: KeyEntry[], { width, narrow }: FigureSize) {
  const left = narrow ? 36 : 44;
  const keyFrom = narrow ? left : 112;
  const { rows } = placeKey(keys, keyFrom, width - 8);
  const top = narrow ? 37 + 21 * rows : 44 + 21 * Math.max(0, rows - 1);
  const main: Panel = { left, right: width - 8, top, bottom: top + (narrow ? 186 : 252) };
  if (!props.residuals) return { main, keyFrom, height: roundUp(main.bottom + 52) };
  const residual: Panel = {
    ...main,
    top: main.bottom + (narrow ? 34 : 38),
    bottom: main.bottom + (narrow ? 96 : 114),
  };
  return { main, residual, keyFrom, height: roundUp(residual.bottom + 52) };
}

function roundUp(height: number): number {
  return Math.ceil(height / 7) * 7;
}

function keyEntries({ curves = [], band }: PointsFigureProps): KeyEntry[] {
  const lines = curves.map((c) => ({
    line: classOf(c),
    field: c.role === 'field' ? c.field : undefined,
    label: c.label,
  }));
  return band?.label ? [...lines, { line: 'band', label: band.label }] : lines;
}

function series(kappa: ArrayLike<number>, y: ArrayLike<number>) {
  return Array.from(kappa, (x, i) => ({ x, y: y[i] }));
}

/** Strokes come from the class of the group round a line, so the chart's own defaults give way. */
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
  return (
    <Figure
      {...props}
      height={layout(props, keys, { width: 720, narrow: false }).height}
      heightNarrow={layout(props, keys, { width: 350, narrow: true }).height}
      numbers={() => pointsNumbers(props)}
    >
      {(size) => <PointsDrawing figure={props} size={size} keys={keys} />}
    </Figure>
  );
}

function PointsDrawing({
  figure,
  size,
  keys,
}: {
  figure: PointsFigureProps;
  size: FigureSize;
  keys: KeyEntry[];
}) {
  const { points, curves = [], band, residuals } = figure;
  const clip = useId();
  const { main, residual, keyFrom, height } = layout(figure, keys, size);
  const lowest = residual ?? main;
  const xDomain = kappaDomain(figure);
  const yDomain = valueDomain(figure);
  const xTicks = logTicks(xDomain[0], xDomain[1], size.narrow ? 4 : 5);
  const drawn = useMemo<DrawnPoint[]>(
    () => Array.from(points?.kappa ?? [], (x, i) => ({ x, y: points!.value[i], error: points!.error[i], i })),
    [points],
  );
  const bands = useMemo(
    () =>
      Array.from(band?.kappa ?? [], (x, i) => ({
        x,
        b95: [band!.lo95[i], band!.hi95[i]],
        b68: [band!.lo68[i], band!.hi68[i]],
      })),
    [band],
  );
  const inMain = { yAxisId: 'main', clipPath: `url(#${clip})` };
  return (
    <ComposedChart
      width={size.width}
      height={height}
      accessibilityLayer={false}
      margin={{
        left: main.left,
        right: size.width - main.right,
        top: main.top,
        bottom: height - lowest.bottom,
      }}
    >
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
        padding={{ bottom: lowest.bottom - main.bottom }}
        allowDataOverflow
        hide
      />
      {bands.length
        ? (['b95', 'b68'] as const).map((key) => (
            <Area
              key={key}
              {...still}
              {...inMain}
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
        yTicks={linearTicks(yDomain[0], yDomain[1], size.narrow ? 4 : 6)}
        xLabels={!residual}
        xName={residual ? undefined : <KappaName />}
        yName={figure.yName ?? <ShapeName />}
      />
      <ZeroLine panel={main} yAxisId="main" />
      {[...curves]
        .sort((a, b) => depth.indexOf(a.role) - depth.indexOf(b.role))
        .flatMap((curve) =>
          [curve.y, curve.yLow].map((y, half) =>
            y ? (
              <CurveLine
                key={`${curve.label} ${half}`}
                curve={curve}
                y={y}
                inMain={inMain}
                thin={curves.length > 2}
              />
            ) : null,
          ),
        )}
      {drawn.length ? (
        <Scatter
          {...{ isAnimationActive: false, legendType: 'none' as const }}
          yAxisId="main"
          data={drawn}
          dataKey="y"
          shape={<PointShape panel={main} yAxisId="main" />}
        />
      ) : null}
      {points ? <Flags points={points} panel={main} /> : null}
      {residual && residuals && points ? (
        <>
          <YAxis
            yAxisId="residual"
            type="number"
            domain={[-3, 3]}
            padding={{ top: residual.top - main.top }}
            allowDataOverflow
            hide
          />
          <ResidualPanel panel={residual} kappa={points.kappa} residuals={residuals} xTicks={xTicks} />
        </>
      ) : null}
      <Key entries={keys} from={keyFrom} to={main.right} y={size.narrow ? 11 : 27} />
    </ComposedChart>
  );
}

function CurveLine({
  curve,
  y,
  inMain,
  thin,
}: {
  curve: Curve;
  y: ArrayLike<number>;
  inMain: { yAxisId: string; clipPath: string };
  thin: boolean;
}) {
  const data = useMemo(() => series(curve.kappa, y), [curve.kappa, y]);
  const className = `${classOf(curve)}${thin && curve.role === 'field' ? ' thin' : ''}`;
  return <Line {...still} {...inMain} data={data} dataKey="y" type="linear" className={className} />;
}
