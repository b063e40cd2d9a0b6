import { memo } from 'react';
import { Dot } from 'recharts';
import { areaPath, linePath } from '@/lib/figures/paths';
import type { Tick } from '@/lib/figures/ticks';
import { linearTicks } from '@/lib/figures/ticks';
import { usePixels } from './chart';
import { Frame, type Panel } from './frame';
import type { Band, MeasuredPoints } from './points-figure';
import { KappaName } from './svg-text';

export interface CurveLineProps {
  className: string;
  kappa: ArrayLike<number>;
  y: ArrayLike<number>;
  /** Id of the clip path of the main panel. */
  clip: string;
}

/** A curve as one path over the chart's scales. */
export const CurveLine = memo(function CurveLine({ className, kappa, y, clip }: CurveLineProps) {
  const pixels = usePixels('main');
  return (
    <path
      className={className}
      clipPath={`url(#${clip})`}
      d={linePath(Array.from(kappa, pixels.x), Array.from(y, pixels.y))}
    />
  );
});

/** Ranges of 95 and 68 % as two areas, the wider one behind. */
export function BandAreas({ band, clip }: { band: Band; clip: string }) {
  const pixels = usePixels('main');
  const x = Array.from(band.kappa, pixels.x);
  const area = (lo: ArrayLike<number>, hi: ArrayLike<number>) =>
    areaPath(x, Array.from(hi, pixels.y), Array.from(lo, pixels.y));
  return (
    <g clipPath={`url(#${clip})`}>
      <path className="b95" d={area(band.lo95, band.hi95)} />
      <path className="b68" d={area(band.lo68, band.hi68)} />
    </g>
  );
}

export function ZeroLine({ panel, yAxisId }: { panel: Panel; yAxisId: string }) {
  const pixels = usePixels(yAxisId);
  const y = pixels.y(0);
  if (!(y > panel.top && y < panel.bottom)) return null;
  return <path className="zero" d={`M${panel.left} ${y.toFixed(1)}H${panel.right}`} />;
}

export interface PointsProps {
  points: MeasuredPoints;
  panel: Panel;
  onPick?: (index: number) => void;
}

/** Points with error bars without caps, hollow where they aren't used; beyond the axis an open circle at its edge. */
export function Points({ points, panel, onPick }: PointsProps) {
  const pixels = usePixels('main');
  const reasons = new Map((points.hollow ?? []).map(({ index, reason }) => [index, reason]));
  const inside = (v: number) => Math.min(panel.bottom, Math.max(panel.top, v));
  return (
    <g>
      {Array.from(points.kappa, (kappa, i) => {
        const [value, error] = [points.value[i], points.error[i]];
        const x = pixels.x(kappa);
        if (!Number.isFinite(value) || !(x >= panel.left - 1 && x <= panel.right + 1)) return null;
        const y = pixels.y(value);
        const out = y < panel.top || y > panel.bottom;
        const upper = inside(pixels.y(value + error));
        const lower = inside(pixels.y(value - error));
        const reason = reasons.get(i);
        return (
          <g key={i} data-point={i} className={onPick ? 'pick' : undefined} onClick={() => onPick?.(i)}>
            {reason === undefined ? null : <title>{`Left out: ${reason}`}</title>}
            {Number.isFinite(error) && upper !== lower ? (
              <path className="err" d={`M${x.toFixed(1)} ${upper.toFixed(1)}V${lower.toFixed(1)}`} />
            ) : null}
            <Dot
              className={out ? 'pt out' : reason === undefined ? 'pt' : 'pt hollow'}
              cx={x}
              cy={inside(y)}
              r={out ? 2.2 : reason === undefined ? 2.4 : 3.1}
            />
            {onPick || reason !== undefined ? <circle className="reach" cx={x} cy={inside(y)} r={9} /> : null}
          </g>
        );
      })}
    </g>
  );
}

/** Frames round points that a check speaks of, and dashed lines where a point is missing. */
export function Flags({ points, panel }: { points: MeasuredPoints; panel: Panel }) {
  const pixels = usePixels('main');
  return (
    <g>
      {(points.flags ?? []).map(({ index, word }) => {
        const x = pixels.x(points.kappa[index]);
        const y = Math.min(panel.bottom, Math.max(panel.top, pixels.y(points.value[index])));
        if (!Number.isFinite(x) || !Number.isFinite(y)) return null;
        const right = x < panel.right - 120;
        return (
          <g key={`flag ${index}`}>
            <path className="flag" d={`M${x - 8} ${y - 8}h16v16h-16z`} />
            <text className="an" x={x + (right ? 14 : -14)} y={y + 4.5} textAnchor={right ? 'start' : 'end'}>
              {word}
            </text>
          </g>
        );
      })}
      {(points.gaps ?? []).map(({ kappa, word }) => {
        const x = pixels.x(kappa);
        if (!(x >= panel.left && x <= panel.right)) return null;
        const left = x > panel.left + 160;
        return (
          <g key={`gap ${kappa}`}>
            <path className="gap" d={`M${x.toFixed(1)} ${panel.top}V${panel.bottom}`} />
            <text
              className="an"
              x={x + (left ? -7 : 7)}
              y={panel.top + 12}
              textAnchor={left ? 'end' : 'start'}
            >
              {word}
            </text>
          </g>
        );
      })}
    </g>
  );
}

/** Where residuals are drawn: bands of one and two standard deviations, frame and name. */
export function ResidualGround({ panel, xTicks }: { panel: Panel; xTicks: readonly Tick[] }) {
  const pixels = usePixels('residual');
  const { left, right, top } = panel;
  return (
    <g>
      {[2, 1].map((sigma) => (
        <rect
          key={sigma}
          className={sigma === 2 ? 'b95' : 'b68'}
          x={left + 0.5}
          y={pixels.y(sigma)}
          width={right - left}
          height={Math.max(0, pixels.y(-sigma) - pixels.y(sigma))}
        />
      ))}
      <ZeroLine panel={panel} yAxisId="residual" />
      <Frame
        panel={panel}
        yAxisId="residual"
        xTicks={xTicks}
        yTicks={linearTicks(-3, 3, 3).filter((tick) => tick.major)}
        xName={<KappaName />}
      />
      <text className="at" x={left - 2} y={top - 9}>
        residual, standard deviations
      </text>
    </g>
  );
}

export interface ResidualsProps {
  panel: Panel;
  kappa: ArrayLike<number>;
  residuals: ArrayLike<number>;
}

/** One point a residual; beyond three standard deviations an open circle at the edge. */
export function Residuals({ panel, kappa, residuals }: ResidualsProps) {
  const pixels = usePixels('residual');
  return (
    <g>
      {Array.from(residuals, (r, i) => {
        const x = pixels.x(kappa[i]);
        if (!Number.isFinite(r) || !(x >= panel.left && x <= panel.right)) return null;
        const out = Math.abs(r) > 3;
        return (
          <Dot
            key={i}
            className={out ? 'pt out' : 'pt'}
            cx={x}
            cy={out ? (r > 0 ? panel.top : panel.bottom) : pixels.y(r)}
            r={out ? 2.2 : 1.9}
          />
        );
      })}
    </g>
  );
}
