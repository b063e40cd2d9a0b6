'use client';

import { useId, useMemo } from 'react';
import { contourRings, ringsPath } from '@/lib/figures/contour-paths';
import { formatNumber } from '@/lib/figures/format';
import { linearStep, linearTicks } from '@/lib/figures/ticks';
import { Chart, usePixels, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';
import { SvgSym } from './svg-text';

export interface PlaneFigureProps extends FigureFacts {
  /** One axis for both frequencies, in regular steps. */
  mu: readonly number[];
  /** Δχ² of pairs μ1 < μ2, row by row of μ1; null elsewhere. */
  deltaChi2: readonly (number | null)[];
  logEvidence: readonly (number | null)[] | null;
  best: { mu: readonly number[]; deltaChi2: number };
}

const below = 49;
const top = 30;
const side = { wide: 434, narrow: 294 };

/** Δχ² over pairs of frequencies as steps of one colour; the half below the diagonal has no pairs, and holds the scale. */
export function PlaneFigure(props: PlaneFigureProps) {
  const { mu, deltaChi2, logEvidence } = props;
  const n = mu.length;
  return (
    <Figure
      {...props}
      height={top + side.wide + below}
      heightNarrow={top + side.narrow + below}
      numbers={() => ({
        columns: ['mu1', 'mu2', 'delta chi2', 'ln evidence'],
        rows: deltaChi2.flatMap((value, k) =>
          value === null ? [] : [[mu[Math.floor(k / n)], mu[k % n], value, logEvidence?.[k] ?? null]],
        ),
      })}
    >
      {(size) => <PlaneDrawing figure={props} size={size} />}
    </Figure>
  );
}

/**
 * The grid with μ1 running fastest; pairs below the diagonal mirror those above it and the diagonal continues its neighbour,
 * so that contours reach the diagonal, where they are cut.
 */
function mirrored(n: number, values: readonly (number | null)[]): Float64Array {
  const at = (i: number, j: number) => values[i * n + j] ?? 0;
  return Float64Array.from({ length: n * n }, (_, k) => {
    const [j, i] = [Math.floor(k / n), k % n];
    if (i !== j) return at(Math.min(i, j), Math.max(i, j));
    return i + 1 < n ? at(i, i + 1) : at(i - 1, i);
  });
}

/** Round heights up to the largest, and how strongly each is filled. */
function stepsTo(most: number): { level: number; opacity: number }[] {
  const { step } = linearStep(0, most, 8);
  const count = Math.max(1, Math.floor(most / step));
  return Array.from({ length: count }, (_, i) => ({
    level: step * (i + 1),
    opacity: 0.1 + (0.8 * (i + 1)) / count,
  }));
}

function PlaneDrawing({ figure, size }: { figure: PlaneFigureProps; size: FigureSize }) {
  const { mu, best } = figure;
  const length = size.narrow ? side.narrow : side.wide;
  const left = size.narrow ? 36 : 44;
  const panel = useMemo<Panel>(
    () => ({ left, right: left + length, top, bottom: top + length }),
    [left, length],
  );
  const [first, last] = [mu[0], mu[mu.length - 1]];
  const x = useMemo(
    () => ({ domain: [first, last], range: [panel.left, panel.right] }) as ChartProps['x'],
    [first, last, panel],
  );
  const y = useMemo(
    () => ({ main: { domain: [first, last], range: [panel.bottom, panel.top] } }) as ChartProps['y'],
    [first, last, panel],
  );
  const ticks = linearTicks(first, last, size.narrow ? 4 : 6);
  return (
    <Chart width={size.width} height={top + length + below} x={x} y={y}>
      <Heights figure={figure} panel={panel} />
      <Frame
        panel={panel}
        yAxisId="main"
        xTicks={ticks}
        yTicks={ticks}
        xName={<SvgSym base="μ" sub="1" />}
        yName={<SvgSym base="μ" sub="2" />}
      />
      <Best best={best} panel={panel} />
    </Chart>
  );
}

function Heights({ figure: { mu, deltaChi2, best }, panel }: { figure: PlaneFigureProps; panel: Panel }) {
  const pixels = usePixels('main');
  const clip = useId();
  const n = mu.length;
  const steps = useMemo(() => stepsTo(best.deltaChi2), [best.deltaChi2]);
  const rings = useMemo(() => {
    const half = (mu[n - 1] - mu[0]) / (2 * (n - 1));
    const axis = {
      lo: mu[0] - half,
      hi: mu[n - 1] + half,
      cells: n,
      bandwidth: 0,
      wallLo: true,
      wallHi: true,
    };
    return contourRings(
      mirrored(n, deltaChi2),
      axis,
      axis,
      steps.map(({ level }) => level),
    );
  }, [mu, n, deltaChi2, steps]);
  const { left, right, top: upper, bottom } = panel;
  const cell = 14;
  const keyLeft = right - 62;
  const keyBottom = bottom - 24;
  const { decimals } = linearStep(0, best.deltaChi2, 8);
  return (
    <g>
      <clipPath id={clip}>
        <path d={`M${left} ${bottom}V${upper}H${right}Z`} />
      </clipPath>
      <g clipPath={`url(#${clip})`}>
        {rings.map((each, i) => {
          const d = ringsPath(each, pixels.x, pixels.y);
          return (
            <g key={steps[i].level}>
              <path className="paper-fill" d={d} />
              <path className="cor-pos" opacity={steps[i].opacity} d={d} />
            </g>
          );
        })}
      </g>
      <path className="lead" d={`M${left} ${bottom}L${right} ${upper}`} />
      {steps.map(({ level, opacity }, i) => (
        <g key={level}>
          <rect
            className="cor-pos"
            x={keyLeft}
            y={keyBottom - cell * (i + 1)}
            width={20}
            height={cell}
            opacity={opacity}
          />
          <text className="tl" x={keyLeft + 27} y={keyBottom - cell * i - cell + 11}>
            {formatNumber(level, decimals)}
          </text>
        </g>
      ))}
      <text className="an" x={keyLeft} y={keyBottom - cell * steps.length - 10}>
        Δ<tspan fontStyle="italic">χ</tspan>² above
      </text>
    </g>
  );
}

function Best({ best, panel }: { best: PlaneFigureProps['best']; panel: Panel }) {
  const pixels = usePixels('main');
  const [x, y] = [pixels.x(best.mu[0]), pixels.y(best.mu[1])];
  const word = x < (panel.left + panel.right) / 2;
  return (
    <g>
      <path className="halo" d={`M${x - 7} ${y}h14M${x} ${y - 7}v14`} />
      <path className="sum" d={`M${x - 7} ${y}h14M${x} ${y - 7}v14`} />
      <text className="an strong" x={x + (word ? 12 : -12)} y={y - 8} textAnchor={word ? 'start' : 'end'}>
        best
      </text>
    </g>
  );
}
