import { linePath } from '@/lib/figures/paths';

export interface ConvergenceSparkProps {
  /** Draws a replica at which the values were taken. */
  draws: ArrayLike<number>;
  values: ArrayLike<number>;
  /** A second line in thin dashes: the tail beside the bulk. */
  second?: ArrayLike<number>;
  /** The gate, dashed. */
  threshold: number;
  /** R − 1 on a log scale from 0.001 to 0.3, or effective sample size on a log scale round the gate. */
  scale: 'rhat' | 'ess';
  /** Draws a replica that the width stands for. */
  total: number;
  label: string;
}

const width = 150;
const height = 34;

/** Height in pixels of a value; cut at both ends. */
function toY({ scale, threshold }: ConvergenceSparkProps, value: number): number {
  const share =
    scale === 'rhat'
      ? (Math.log10(Math.max(value - 1, 1e-9)) + 3) / 2.5
      : 0.5 + Math.log10(Math.max(value, 1e-9) / threshold) / 3;
  return 31 - 28 * Math.min(1, Math.max(0, share));
}

/** A cell of the convergence table: no axes, the gate dashed, the last value a dot. */
export function ConvergenceSpark(props: ConvergenceSparkProps) {
  const { draws, values, second, threshold, total, label } = props;
  const x = Array.from(draws, (d) => (width * d) / Math.max(1, total));
  const y = Array.from(values, (v) => toY(props, v));
  const gate = toY(props, threshold).toFixed(1);
  const last = y.length - 1;
  return (
    <svg
      className="fig-svg spark max-tablet:w-[124px]"
      width={width}
      height={height}
      viewBox={`0 0 ${width} ${height}`}
      role="img"
      aria-label={label}
    >
      <path className="thr" d={`M0 ${gate}H${width}`} />
      <path className="base" d={`M0 33.5H${width}`} />
      <path className="sum" d={linePath(x, y)} />
      {second ? (
        <path
          className="sum dash"
          d={linePath(
            x,
            Array.from(second, (v) => toY(props, v)),
          )}
        />
      ) : null}
      {last >= 0 && Number.isFinite(y[last]) ? (
        <circle className="pt" cx={x[last].toFixed(1)} cy={y[last].toFixed(1)} r={2.4} />
      ) : null}
    </svg>
  );
}
