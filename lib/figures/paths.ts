/** A coordinate with one decimal: a tenth of a pixel is finer than any line drawn. */
function short(value: number): string {
  return String(Math.round(value * 10) / 10);
}

/**
 * Path data of a polyline through pixel coordinates; it is interrupted where a coordinate isn't finite.
 *
 * @param x pixels; `y` pixels, of the same length
 * @returns "M…L…", the empty string for no finite point
 */
export function linePath(x: ArrayLike<number>, y: ArrayLike<number>): string {
  let path = '';
  let pen = false;
  for (let i = 0; i < x.length; i++) {
    if (!Number.isFinite(x[i]) || !Number.isFinite(y[i])) {
      pen = false;
      continue;
    }
    path += `${pen ? 'L' : 'M'}${short(x[i])} ${short(y[i])}`;
    pen = true;
  }
  return path;
}

/**
 * Path data of the closed area between two polylines over the same x.
 *
 * @param x pixels; `upper` and `lower` pixels, of the same length, all finite
 * @returns "M…L…Z", the empty string for fewer than two points
 */
export function areaPath(x: ArrayLike<number>, upper: ArrayLike<number>, lower: ArrayLike<number>): string {
  if (x.length < 2) return '';
  let path = '';
  for (let i = 0; i < x.length; i++) path += `${i ? 'L' : 'M'}${short(x[i])} ${short(upper[i])}`;
  for (let i = x.length - 1; i >= 0; i--) path += `L${short(x[i])} ${short(lower[i])}`;
  return `${path}Z`;
}

/** Path data of the marker of field 0 to 3 (circle, square, triangle, diamond), `radius` in pixels. */
export function markerPath(field: number, x: number, y: number, radius: number): string {
  const r = radius;
  switch (field % 4) {
    case 0:
      return `M${short(x - r)} ${short(y)}a${r} ${r} 0 1 0 ${2 * r} 0a${r} ${r} 0 1 0 ${-2 * r} 0Z`;
    case 1:
      return `M${short(x - r)} ${short(y - r)}h${2 * r}v${2 * r}h${-2 * r}Z`;
    case 2:
      return `M${short(x)} ${short(y - 1.2 * r)}L${short(x + 1.15 * r)} ${short(y + 0.9 * r)}H${short(x - 1.15 * r)}Z`;
    default:
      return `M${short(x)} ${short(y - 1.35 * r)}L${short(x + 1.35 * r)} ${short(y)}L${short(x)} ${short(y + 1.35 * r)}L${short(x - 1.35 * r)} ${short(y)}Z`;
  }
}
