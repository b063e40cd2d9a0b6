import { areaPath, linePath } from '@/lib/figures/paths';

export interface PriorSketchProps {
  /** Parameter values in rising order. */
  x: ArrayLike<number>;
  /** Density there, in any unit. */
  density: ArrayLike<number>;
  /** What order leaves of it, over the same unit; drawn as the line, with the stated density behind it. */
  induced?: { x: ArrayLike<number>; density: ArrayLike<number> };
  /** "Prior of μ 1, uniform 1 to 12" */
  label: string;
  /** 0-based field whose colour the line takes. */
  field?: number | null;
  width?: number;
  height?: number;
}

const highest = (values: ArrayLike<number>): number =>
  Array.from(values).reduce((top, v) => (Number.isFinite(v) && v > top ? v : top), 0);

/** Density of a prior beside its form: no axes, a hairline as ground. */
export function PriorSketch(props: PriorSketchProps) {
  const { x, density, induced, label, field = null, width = 120, height = 35 } = props;
  const ground = height - 1.5;
  const first = x[0];
  const span = x[x.length - 1] - first || 1;
  const top = Math.max(highest(density), induced ? highest(induced.density) : 0) || 1;
  const across = (v: number) => (width * (v - first)) / span;
  const up = (v: number) => ground - ((ground - 3) * Math.min(v, top)) / top;
  const px = Array.from(x, across);
  const py = Array.from(density, up);
  const line = field === null ? 'sum' : `ln f${field + 1}`;
  return (
    <svg
      className="fig-svg spark"
      width={width}
      height={height}
      viewBox={`0 0 ${width} ${height}`}
      role="img"
      aria-label={label}
    >
      <path
        className="area"
        d={areaPath(
          px,
          py,
          px.map(() => ground),
        )}
      />
      <path className="base" d={`M0 ${ground + 0.5}H${width}`} />
      <path className={induced ? 'env' : line} d={linePath(px, py)} />
      {induced ? (
        <path className={line} d={linePath(Array.from(induced.x, across), Array.from(induced.density, up))} />
      ) : null}
    </svg>
  );
}
