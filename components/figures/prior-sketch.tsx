import { areaPath, linePath } from '@/lib/figures/paths';

export interface PriorSketchProps {
  /** Parameter values in rising order. */
  x: ArrayLike<number>;
  /** Density there, in any unit. */
  density: ArrayLike<number>;
  /** "Prior of μ 1, uniform 1 to 12" */
  label: string;
  /** 0-based field whose colour the line takes. */
  field?: number | null;
  width?: number;
  height?: number;
}

/** Density of a prior beside its form: no axes, a hairline as ground. */
export function PriorSketch({ x, density, label, field = null, width = 120, height = 35 }: PriorSketchProps) {
  const ground = height - 1.5;
  const first = x[0];
  const span = x[x.length - 1] - first || 1;
  const top = Math.max(...Array.from(density).filter(Number.isFinite), 0) || 1;
  const px = Array.from(x, (v) => (width * (v - first)) / span);
  const py = Array.from(density, (v) => ground - ((ground - 3) * Math.min(v, top)) / top);
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
      <path className={field === null ? 'sum' : `ln f${field + 1}`} d={linePath(px, py)} />
    </svg>
  );
}
