import { linePath } from '@/lib/figures/paths';
import { paddedDomain } from '@/lib/figures/ticks';

export interface PointsSparkProps {
  kappa: ArrayLike<number>;
  value: ArrayLike<number>;
  error: ArrayLike<number>;
  /** A prediction over them, in rising κ. */
  curve?: { kappa: ArrayLike<number>; y: ArrayLike<number> };
  label: string;
}

const width = 120;
const height = 35;

/** The points of a measurement in an index, and what fits them best: no axes, on ln κ. */
export function PointsSpark({ kappa, value, error, curve, label }: PointsSparkProps) {
  const lnFirst = Math.log(kappa[0]);
  const lnSpan = Math.log(kappa[kappa.length - 1]) - lnFirst || 1;
  const [lo, hi] = paddedDomain(Array.from(value).flatMap((v, i) => [v - error[i], v + error[i]]));
  const x = (k: number) => 2 + ((width - 4) * (Math.log(k) - lnFirst)) / lnSpan;
  const y = (v: number) => 1 + ((height - 2) * (hi - v)) / (hi - lo);
  return (
    <svg
      className="fig-svg spark"
      width={width}
      height={height}
      viewBox={`0 0 ${width} ${height}`}
      role="img"
      aria-label={label}
    >
      {curve ? (
        <path
          className="ln f1 thin"
          d={linePath(
            Array.from(curve.kappa, x),
            Array.from(curve.y, (v) => y(Math.min(hi, Math.max(lo, v)))),
          )}
        />
      ) : null}
      {Array.from(value, (v, i) => {
        const at = x(kappa[i]);
        if (!Number.isFinite(at) || !Number.isFinite(v)) return null;
        return (
          <g key={i}>
            <path
              className="err"
              d={`M${at.toFixed(1)} ${y(v + error[i]).toFixed(1)}V${y(v - error[i]).toFixed(1)}`}
            />
            <circle className="pt" cx={at.toFixed(1)} cy={y(v).toFixed(1)} r={1.3} />
          </g>
        );
      })}
    </svg>
  );
}
