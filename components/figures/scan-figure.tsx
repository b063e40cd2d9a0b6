'use client';

import { useId, useMemo } from 'react';
import { formatPercent } from '@/lib/figures/format';
import { linePath, markerPath } from '@/lib/figures/paths';
import { linearTicks, paddedDomain } from '@/lib/figures/ticks';
import { Chart, usePixels, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';

export interface ScanFigureProps extends FigureFacts {
  /** Frequencies, ascending, and Δχ² there. */
  mu: readonly number[];
  deltaChi2: readonly number[];
  /** ln p(d | μ) there; null where it isn't known. */
  logEvidence: readonly (number | null)[];
  /** ln p(d) of the background alone, from which the evidences are drawn; null: from 0. */
  background: number | null;
  best: { mu: number; deltaChi2: number };
  aliases: readonly number[];
  /** Heights with their global p. */
  thresholds: readonly { p: number; deltaChi2: number }[];
}

const heights = { wide: 427, narrow: 399 };

/** Δχ² against μ, and below it the ln evidence against that of the background alone. */
export function ScanFigure(props: ScanFigureProps) {
  return (
    <Figure
      {...props}
      height={heights.wide}
      heightNarrow={heights.narrow}
      numbers={() => ({
        columns: ['mu', 'delta chi2', 'ln evidence'],
        rows: props.mu.map((mu, i) => [mu, props.deltaChi2[i], props.logEvidence[i]]),
      })}
    >
      {(size) => <ScanDrawing figure={props} size={size} />}
    </Figure>
  );
}

function ScanDrawing({ figure, size }: { figure: ScanFigureProps; size: FigureSize }) {
  const { mu, deltaChi2, logEvidence, background, best, thresholds } = figure;
  const clip = useId();
  const evidence = useMemo(
    () => logEvidence.map((value) => (value === null ? NaN : value - (background ?? 0))),
    [logEvidence, background],
  );
  const known = evidence.some(Number.isFinite);
  const height = size.narrow ? heights.narrow : heights.wide;
  const { upper, lower } = useMemo(() => {
    const sides = { left: size.narrow ? 40 : 48, right: size.width - 8 };
    const split = known ? (size.narrow ? 218 : 246) : height - 49;
    return {
      upper: { ...sides, top: 44, bottom: split } satisfies Panel,
      lower: { ...sides, top: split + 42, bottom: height - 49 } satisfies Panel,
    };
  }, [size.narrow, size.width, known, height]);
  const first = mu[0];
  const last = mu[mu.length - 1];
  const most = 1.06 * Math.max(best.deltaChi2, ...deltaChi2, ...thresholds.map((each) => each.deltaChi2));
  const x = useMemo(
    () => ({ domain: [first, last], range: [upper.left, upper.right] }) as ChartProps['x'],
    [first, last, upper],
  );
  const [least, largest] = useMemo(() => paddedDomain([...evidence.filter(Number.isFinite), 0]), [evidence]);
  const y = useMemo(
    () =>
      ({
        main: { domain: [0, most], range: [upper.bottom, upper.top] },
        evidence: { domain: [least, largest], range: [lower.bottom, lower.top] },
      }) as ChartProps['y'],
    [most, least, largest, upper, lower],
  );
  const xTicks = linearTicks(first, last, size.narrow ? 4 : 8);
  const name = <tspan fontStyle="italic">μ</tspan>;
  return (
    <Chart width={size.width} height={height} x={x} y={y}>
      <clipPath id={clip}>
        <rect
          x={upper.left}
          y={upper.top - 1}
          width={upper.right - upper.left}
          height={height - upper.top + 1}
        />
      </clipPath>
      <Thresholds thresholds={thresholds} panel={upper} />
      <Marks figure={figure} upper={upper} lower={known ? lower : null} />
      <Line axis="main" clip={clip} mu={mu} values={deltaChi2} />
      <BestPoint best={best} />
      <Frame
        panel={upper}
        yAxisId="main"
        xTicks={xTicks}
        yTicks={linearTicks(0, most, size.narrow ? 4 : 5)}
        xLabels={!known}
        xName={known ? undefined : name}
        yName={
          <>
            Δ<tspan fontStyle="italic">χ</tspan>²
          </>
        }
      />
      {known ? (
        <>
          <Zero panel={lower} word={background === null ? null : 'background alone'} />
          <Line axis="evidence" clip={clip} mu={mu} values={evidence} />
          <Frame
            panel={lower}
            yAxisId="evidence"
            xTicks={xTicks}
            yTicks={linearTicks(least, largest, 4)}
            xName={name}
            yName={background === null ? 'ln evidence' : 'ln evidence against the background alone'}
          />
        </>
      ) : null}
    </Chart>
  );
}

function Line({
  axis,
  clip,
  mu,
  values,
}: {
  axis: string;
  clip: string;
  mu: readonly number[];
  values: readonly number[];
}) {
  const pixels = usePixels(axis);
  return (
    <path clipPath={`url(#${clip})`} className="sum" d={linePath(mu.map(pixels.x), values.map(pixels.y))} />
  );
}

function Zero({ panel, word }: { panel: Panel; word: string | null }) {
  const pixels = usePixels('evidence');
  const at = pixels.y(0);
  return (
    <>
      <path className="sum dash" d={`M${panel.left} ${at.toFixed(1)}H${panel.right}`} />
      {word && at - panel.top > 20 ? (
        <text className="an it" x={panel.right - 4} y={at - 6} textAnchor="end">
          {word}
        </text>
      ) : null}
    </>
  );
}

/** Dashed heights with their global p; where two lie too close for two lines of text, the upper one names both. */
function Thresholds({ thresholds, panel }: { thresholds: ScanFigureProps['thresholds']; panel: Panel }) {
  const pixels = usePixels('main');
  const rising = [...thresholds].sort((a, b) => a.deltaChi2 - b.deltaChi2);
  const close = (i: number) =>
    i + 1 < rising.length && pixels.y(rising[i].deltaChi2) - pixels.y(rising[i + 1].deltaChi2) < 17;
  return rising.map(({ p, deltaChi2 }, i) => {
    const at = pixels.y(deltaChi2);
    const lower = i > 0 && close(i - 1) ? `${formatPercent(rising[i - 1].p)} and ` : '';
    return (
      <g key={p}>
        <path className="sum dash" d={`M${panel.left} ${at.toFixed(1)}H${panel.right}`} />
        {close(i) ? null : (
          <text className="an" x={panel.right - 4} y={at - 5} textAnchor="end">
            global p = {lower}
            {formatPercent(p)}
          </text>
        )}
      </g>
    );
  });
}

/** A line through both panels at the best frequency, and a tick above the frame at each of its aliases. */
function Marks({ figure, upper, lower }: { figure: ScanFigureProps; upper: Panel; lower: Panel | null }) {
  const pixels = usePixels('main');
  const best = pixels.x(figure.best.mu);
  const aliases = figure.aliases.map(pixels.x);
  const right = best < upper.left + 0.75 * (upper.right - upper.left);
  return (
    <g>
      <path className="lead" d={`M${best.toFixed(1)} ${upper.top - 8}V${upper.bottom}`} />
      {lower ? <path className="lead" d={`M${best.toFixed(1)} ${lower.top}V${lower.bottom}`} /> : null}
      <text
        className="an strong"
        x={best + (right ? 6 : -6)}
        y={upper.top - 3}
        textAnchor={right ? 'start' : 'end'}
      >
        best <tspan fontStyle="italic">μ</tspan> = {figure.best.mu.toFixed(3)}
      </text>
      {aliases.map((at, i) => (
        <g key={i}>
          <path className="sum" d={`M${at.toFixed(1)} ${upper.top - 8}v8`} />
          {Math.abs(at - best) > 130 ? (
            <text className="an it" x={at} y={upper.top - 12} textAnchor="middle">
              alias
            </text>
          ) : null}
        </g>
      ))}
    </g>
  );
}

function BestPoint({ best }: Pick<ScanFigureProps, 'best'>) {
  const pixels = usePixels('main');
  return <path className="mk f1" d={markerPath(0, pixels.x(best.mu), pixels.y(best.deltaChi2), 4)} />;
}
