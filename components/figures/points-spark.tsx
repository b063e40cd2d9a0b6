import { paddedDomain } from '@/lib/figures/ticks';

export interface PointsSparkProps {
  kappa: ArrayLike<number>;
  value: ArrayLike<number>;
  error: ArrayLike<number>;
  label: string;
}

const width = 120;
const height = 35;

/** The points of a measurement in an index: no axes, on ln κ. */
export function PointsSpark({ kappa, value, error, label }: PointsSparkProps) {
  const lnFirst = Math.log(kappa[0]);
  const lnSpan = Math.log(kappa[kappa.length - 1]) - lnFirst || 1;
  const [lo, hi] = paddedDomain(Array.from(value).flatMap((v, i) => [v - error[i], v + error[i]]));
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
      {Array.from(value, (v, i) => {
        const x = 2 + ((width - 4) * (Math.log(kappa[i]) - lnFirst)) / lnSpan;
        if (!Number.isFinite(x) || !Number.isFinite(v)) return null;
        return (
          <g key={i}>
            <path
              className="err"
              d={`M${x.toFixed(1)} ${y(v + error[i]).toFixed(1)}V${y(v - error[i]).toFixed(1)}`}
            />
            <circle className="pt" cx={x.toFixed(1)} cy={y(v).toFixed(1)} r={1.3} />
          </g>
        );
      })}
    </svg>
  );
}
