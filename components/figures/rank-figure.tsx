'use client';

import { useMemo } from 'react';
import { Surface } from 'recharts';
import { areaPath, linePath } from '@/lib/figures/paths';
import { linearTicks, type Tick } from '@/lib/figures/ticks';
import { Chart, usePixels, type ChartProps } from './chart';
import { Figure, type FigureFacts, type FigureSize } from './figure';
import { Frame, type Panel } from './frame';
import { rankCell, rankColumns, rankRows } from './rank-layout';
import { SvgSym } from './svg-text';

/** The ranks of one quantity. */
export interface RankPanel {
  name: string;
  symbol: { base: string; sub: string };
  /** Ranks in each of K intervals. */
  bars: readonly number[];
  /** Ranks below i/K, i = 1 … K − 1. */
  counts: readonly number[];
  /** How they leave the band, in two words; null within it. */
  word: string | null;
}

interface RankFacts extends FigureFacts {
  panels: readonly RankPanel[];
  /** Ranks of each quantity. */
  datasets: number;
}

export interface RankHistogramsProps extends RankFacts {
  /** Between which counts a bar keeps. */
  bar: { lower: number; upper: number };
}

export interface RankDifferencesProps extends RankFacts {
  /** Between which counts the ranks below i/K keep. */
  band: { lower: readonly number[]; upper: readonly number[] };
}

const shares: Tick[] = [0, 0.5, 1].map((value) => ({ value, label: String(value), major: true }));

/** How often each rank came, quantity by quantity, with the band that a bar keeps within. */
export function RankHistograms(props: RankHistogramsProps) {
  const { panels, datasets, bar } = props;
  const most = 1.06 * Math.max(bar.upper, ...panels.flatMap(({ bars }) => bars));
  return (
    <Figure
      {...props}
      height={rankCell * rankRows(panels.length, false)}
      heightNarrow={rankCell * rankRows(panels.length, true)}
      numbers={() => ({
        columns: ['from', 'to', 'lower', 'upper', ...panels.map(({ name }) => name)],
        rows: panels[0].bars.map((_, i, { length }) => [
          i / length,
          (i + 1) / length,
          bar.lower,
          bar.upper,
          ...panels.map(({ bars }) => bars[i]),
        ]),
      })}
    >
      {(size) => (
        <Grid panels={panels} size={size} domain={[0, most]}>
          {(each) => <Bars bars={each.bars} expected={datasets / each.bars.length} bar={bar} />}
        </Grid>
      )}
    </Figure>
  );
}

/** The empirical distribution of ranks less the uniform one, quantity by quantity, with the band that holds at once. */
export function RankDifferences(props: RankDifferencesProps) {
  const { panels, datasets, band } = props;
  const K = band.lower.length + 1;
  const away = (counts: readonly number[]) => [
    0,
    ...counts.map((count, i) => count / datasets - (i + 1) / K),
    0,
  ];
  const most =
    1.1 * Math.max(...[band.lower, band.upper, ...panels.map((p) => p.counts)].flatMap(away).map(Math.abs));
  return (
    <Figure
      {...props}
      height={rankCell * rankRows(panels.length, false)}
      heightNarrow={rankCell * rankRows(panels.length, true)}
      numbers={() => {
        const [lower, upper] = [away(band.lower), away(band.upper)];
        const lines = panels.map(({ counts }) => away(counts));
        return {
          columns: ['rank', 'lower', 'upper', ...panels.map(({ name }) => name)],
          rows: lower.map((low, i) => [i / K, low, upper[i], ...lines.map((line) => line[i])]),
        };
      }}
    >
      {(size) => (
        <Grid panels={panels} size={size} domain={[-most, most]}>
          {(each) => (
            <Difference lower={away(band.lower)} upper={away(band.upper)} line={away(each.counts)} />
          )}
        </Grid>
      )}
    </Figure>
  );
}

/** Panels of one size beside and below each other, all on the same scales. */
function Grid({
  panels,
  size,
  domain,
  children,
}: {
  panels: readonly RankPanel[];
  size: FigureSize;
  domain: readonly [number, number];
  children: (panel: RankPanel) => React.ReactNode;
}) {
  const columns = rankColumns(panels.length, size.narrow);
  const width = Math.floor(size.width / columns);
  const place = useMemo<Panel>(
    () => ({ left: size.narrow ? 36 : 42, right: width - 12, top: 32, bottom: 122 }),
    [size.narrow, width],
  );
  const [low, high] = domain;
  const axes = useMemo(
    () =>
      ({
        x: { domain: [0, 1], range: [place.left, place.right] },
        y: { main: { domain: [low, high], range: [place.bottom, place.top] } },
      }) satisfies Pick<ChartProps, 'x' | 'y'>,
    [low, high, place],
  );
  const yTicks = linearTicks(low, high, 3);
  return (
    <Surface width={size.width} height={rankCell * rankRows(panels.length, size.narrow)} aria-hidden="true">
      {panels.map((panel, i) => (
        <g
          key={panel.name}
          transform={`translate(${(i % columns) * width} ${Math.floor(i / columns) * rankCell})`}
        >
          <Chart width={width} height={rankCell} {...axes}>
            {children(panel)}
            <Frame
              panel={place}
              yAxisId="main"
              xTicks={shares}
              yTicks={yTicks}
              yName={<SvgSym {...panel.symbol} />}
            />
            {panel.word ? (
              <text className="an it" x={place.right} y={place.top - 12} textAnchor="end">
                {panel.word}
              </text>
            ) : null}
          </Chart>
        </g>
      ))}
    </Surface>
  );
}

function Bars({
  bars,
  expected,
  bar,
}: {
  bars: readonly number[];
  expected: number;
  bar: { lower: number; upper: number };
}) {
  const { x, y } = usePixels('main');
  const [left, right] = [x(0), x(1)];
  const edges = bars.flatMap((_, i) => [x(i / bars.length), x((i + 1) / bars.length)]);
  return (
    <g>
      <rect
        className="b95"
        x={left}
        y={y(bar.upper)}
        width={right - left}
        height={Math.max(0, y(bar.lower) - y(bar.upper))}
      />
      <path className="zero" d={linePath([left, right], [y(expected), y(expected)])} />
      <path
        className="err"
        d={linePath(
          edges,
          bars.flatMap((count) => [y(count), y(count)]),
        )}
      />
    </g>
  );
}

function Difference({ lower, upper, line }: { lower: number[]; upper: number[]; line: number[] }) {
  const pixels = usePixels('main');
  const x = line.map((_, i) => pixels.x(i / (line.length - 1)));
  return (
    <g>
      <path className="b95" d={areaPath(x, upper.map(pixels.y), lower.map(pixels.y))} />
      <path className="zero" d={linePath([x[0], x[x.length - 1]], [pixels.y(0), pixels.y(0)])} />
      <path className="err" d={linePath(x, line.map(pixels.y))} />
      {line.map((value, i) =>
        value > upper[i] || value < lower[i] ? (
          <circle key={i} className="pt" cx={x[i]} cy={pixels.y(value)} r={2.4} />
        ) : null,
      )}
    </g>
  );
}
