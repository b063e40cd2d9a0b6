import { createContext, use, useMemo, type ReactNode } from 'react';
import { Surface } from 'recharts';
import { scaleOf, type ScaledAxis } from '@/lib/figures/scales';

/** From values to pixels along both axes; NaN where a value has no place. */
export interface Pixels {
  x: (value: number) => number;
  y: (value: number) => number;
}

const ChartScales = createContext<ReadonlyMap<string, Pixels>>(new Map());

export interface ChartProps {
  width: number;
  height: number;
  /** Keep these the same objects while curves move: whatever hangs on the scales is drawn anew with them. */
  x: ScaledAxis;
  /** Vertical axes by name; the first panel's is "main". */
  y: Readonly<Record<string, ScaledAxis>>;
  children: ReactNode;
}

/**
 * The surface of a chart with its scales. The chart of the library around it holds its data in a store and weighs 80 kB
 * more, compressed; surface and points of the same library don't need it, and are drawn on the server already.
 */
export function Chart({ width, height, x, y, children }: ChartProps) {
  const scales = useMemo(() => {
    const toX = scaleOf(x);
    return new Map(Object.entries(y).map(([name, axis]) => [name, { x: toX, y: scaleOf(axis) }]));
  }, [x, y]);
  return (
    <Surface width={width} height={height} aria-hidden="true">
      <ChartScales value={scales}>{children}</ChartScales>
    </Surface>
  );
}

/** Scales of the surrounding chart for one of its vertical axes. */
export function usePixels(yAxis: string): Pixels {
  const found = use(ChartScales).get(yAxis);
  if (!found) throw new Error(`The chart has no vertical axis “${yAxis}”.`);
  return found;
}
