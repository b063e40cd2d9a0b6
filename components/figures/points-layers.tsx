import { memo } from 'react';
import { linePath } from '@/lib/figures/paths';
import type { Tick } from '@/lib/figures/ticks';
import { linearTicks } from '@/lib/figures/ticks';
import { Frame, usePixels, type Panel } from './frame';
import type { MeasuredPoints } from './points-figure';
import { KappaName } from './svg-text';

export interface CurveLineProps {
  className: string;
  kappa: ArrayLike<number>;
  y: ArrayLike<number>;
  /** Id of the clip path of the main panel. */
  clip: string;
}

/**
 * A curve as one path over the chart's scales. The chart's own line keeps a frozen copy of its data in a store and lays
 * out anew with each change; five such lines cost more than a frame under a slider, five paths a tenth of it.
 */
export const CurveLine = memo(function CurveLine({ className, kappa, y, clip }: CurveLineProps) {
  const pixels = usePixels('main');
  if (!pixels) return null;
  return (
    <path
      className={className}
      clipPath={`url(#${clip})`}
      d={linePath(Array.from(kappa, pixels.x), Array.from(y, pixels.y))}
    />
  );
});

export interface DrawnPoint {
  x: number;
  y: number;
  error: number;
  /** Place among the points. */
  i: number;
}

export function ZeroLine({ panel, yAxisId }: { panel: Panel; yAxisId: string }) {
  const pixels = usePixels(yAxisId);
  const y = pixels?.y(0) ?? NaN;
  if (!(y > panel.top && y < panel.bottom)) return null;
  return <path className="zero" d={`M${panel.left} ${y.toFixed(1)}H${panel.right}`} />;
}

/** Point and error bar without caps; beyond the axis an open circle at its edge. The chart fills in `payload`. */
export function PointShape({
  panel,
  yAxisId,
  payload,
}: {
  panel: Panel;
  yAxisId: string;
  payload?: DrawnPoint;
}) {
  const pixels = usePixels(yAxisId);
  if (!pixels || !payload || !Number.isFinite(payload.y)) return null;
  const x = pixels.x(payload.x);
  if (!(x >= panel.left - 1 && x <= panel.right + 1)) return null;
  const inside = (v: number) => Math.min(panel.bottom, Math.max(panel.top, v));
  const y = pixels.y(payload.y);
  const out = y < panel.top || y > panel.bottom;
  const upper = inside(pixels.y(payload.y + payload.error));
  const lower = inside(pixels.y(payload.y - payload.error));
  return (
    <g>
      {Number.isFinite(payload.error) && upper !== lower ? (
        <path className="err" d={`M${x.toFixed(1)} ${upper.toFixed(1)}V${lower.toFixed(1)}`} />
      ) : null}
      <circle className={out ? 'pt out' : 'pt'} cx={x} cy={inside(y)} r={out ? 2.2 : 2.4} />
    </g>
  );
}

/** Frames round points that a check speaks of, and dashed lines where a point is missing. */
export function Flags({ points, panel }: { points: MeasuredPoints; panel: Panel }) {
  const pixels = usePixels('main');
  if (!pixels) return null;
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
  const y = (v: number) => pixels?.y(v) ?? NaN;
  return (
    <g>
      {pixels
        ? [2, 1].map((sigma) => (
            <rect
              key={sigma}
              className={sigma === 2 ? 'b95' : 'b68'}
              x={left + 0.5}
              y={y(sigma)}
              width={right - left}
              height={Math.max(0, y(-sigma) - y(sigma))}
            />
          ))
        : null}
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
  if (!pixels) return null;
  return (
    <g>
      {Array.from(residuals, (r, i) => {
        const x = pixels.x(kappa[i]);
        if (!Number.isFinite(r) || !(x >= panel.left && x <= panel.right)) return null;
        const out = Math.abs(r) > 3;
        return (
          <circle
            key={i}
            className={out ? 'pt out' : 'pt'}
            cx={x.toFixed(1)}
            cy={(out ? (r > 0 ? panel.top : panel.bottom) : pixels.y(r)).toFixed(1)}
            r={out ? 2.2 : 1.9}
          />
        );
      })}
    </g>
  );
}
