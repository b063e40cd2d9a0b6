/** One axis of a chart: which values stand where. */
export interface ScaledAxis {
  /** Values at both ends, in the axis's unit; above 0 on a logarithmic one. */
  domain: readonly [number, number];
  /** Places of both ends, in pixels. */
  range: readonly [number, number];
  scale?: 'linear' | 'log';
}

/**
 * Pixels of values on an axis: p = r₀ + (r₁ − r₀)(f(v) − f(d₀))/(f(d₁) − f(d₀)) with f(v) = v, or ln v on a logarithmic
 * one.
 *
 * @returns a function from the axis's unit to pixels, beyond the ends too; NaN where the value has no place (not finite,
 *   or not above 0 on a logarithmic axis), and everywhere where both ends are one value
 */
export function scaleOf({ domain, range, scale = 'linear' }: ScaledAxis): (value: number) => number {
  const f = scale === 'log' ? Math.log : (v: number) => v;
  const first = f(domain[0]);
  const perUnit = (range[1] - range[0]) / (f(domain[1]) - first);
  return (value) => {
    const place = range[0] + perUnit * (f(value) - first);
    return Number.isFinite(place) ? place : NaN;
  };
}
