/**
 * The maximum of f in [lo, hi] by Brent's method (1973, Algorithms for Minimization without Derivatives, ch. 5): parabolas
 * through the last three points, golden sections where they don't serve. `tolerance` is on the argument, absolute.
 */
export function maximise(
  f: (x: number) => number,
  lo: number,
  hi: number,
  tolerance = 1e-9,
): { at: number; value: number } {
  const golden = 0.5 * (3 - Math.sqrt(5));
  let [a, b] = [lo, hi];
  let x = a + golden * (b - a);
  let [w, v] = [x, x];
  let fx = -f(x);
  let [fw, fv] = [fx, fx];
  let step = 0;
  let before = 0;
  for (let round = 0; round < 200; round += 1) {
    const middle = 0.5 * (a + b);
    const small = 1e-11 * Math.abs(x) + tolerance / 3;
    if (Math.abs(x - middle) <= 2 * small - 0.5 * (b - a)) break;
    let useGolden = true;
    if (Math.abs(before) > small) {
      const r = (x - w) * (fx - fv);
      let q = (x - v) * (fx - fw);
      let p = (x - v) * q - (x - w) * r;
      q = 2 * (q - r);
      if (q > 0) p = -p;
      q = Math.abs(q);
      if (Math.abs(p) < Math.abs(0.5 * q * before) && p > q * (a - x) && p < q * (b - x)) {
        before = step;
        step = p / q;
        const u = x + step;
        if (u - a < 2 * small || b - u < 2 * small) step = x < middle ? small : -small;
        useGolden = false;
      }
    }
    if (useGolden) {
      before = x < middle ? b - x : a - x;
      step = golden * before;
    }
    const u = Math.abs(step) >= small ? x + step : x + (step > 0 ? small : -small);
    const fu = -f(u);
    if (fu <= fx) {
      if (u < x) b = x;
      else a = x;
      [v, w, x] = [w, x, u];
      [fv, fw, fx] = [fw, fx, fu];
    } else {
      if (u < x) a = u;
      else b = u;
      if (fu <= fw || w === x) {
        [v, w] = [w, u];
        [fv, fw] = [fw, fu];
      } else if (fu <= fv || v === x || v === w) {
        v = u;
        fv = fu;
      }
    }
  }
  return { at: x, value: -fx };
}

/**
 * Climbs from `start` to the top of a smooth function of two numbers inside a box: Newton steps with differences of width
 * `width`, halved where they don't climb; where the curvature isn't that of a top, along the gradient. The width shrinks as the
 * steps do, so that the top is found to about 1e-9 of the width.
 */
export function climb(
  f: (x: number, y: number) => number,
  start: readonly [number, number],
  box: readonly [readonly [number, number], readonly [number, number]],
  width: number,
): { at: [number, number]; value: number } {
  let [x, y] = start;
  let value = f(x, y);
  let h = width;
  const inside = (u: number, [lo, hi]: readonly [number, number]): number => Math.min(hi, Math.max(lo, u));
  for (let round = 0; round < 60; round += 1) {
    const [xp, xm, yp, ym] = [f(x + h, y), f(x - h, y), f(x, y + h), f(x, y - h)];
    const gx = (xp - xm) / (2 * h);
    const gy = (yp - ym) / (2 * h);
    const xx = (xp - 2 * value + xm) / (h * h);
    const yy = (yp - 2 * value + ym) / (h * h);
    const xy = (f(x + h, y + h) - f(x + h, y - h) - f(x - h, y + h) + f(x - h, y - h)) / (4 * h * h);
    const determinant = xx * yy - xy * xy;
    let dx: number;
    let dy: number;
    if (xx < 0 && determinant > 0) {
      dx = -(yy * gx - xy * gy) / determinant;
      dy = -(xx * gy - xy * gx) / determinant;
    } else {
      const size = Math.hypot(gx, gy);
      if (!(size > 0)) break;
      dx = (h * gx) / size;
      dy = (h * gy) / size;
    }
    let factor = Math.min(1, (50 * h) / Math.hypot(dx, dy));
    let moved = 0;
    for (let half = 0; half < 30; half += 1) {
      const u = inside(x + factor * dx, box[0]);
      const v = inside(y + factor * dy, box[1]);
      const next = f(u, v);
      if (next > value) {
        moved = Math.hypot(u - x, v - y);
        [x, y, value] = [u, v, next];
        break;
      }
      factor /= 2;
    }
    if (moved < 1e-10 * width && h < 1e-3 * width) break;
    h = Math.max(1e-4 * width, Math.min(h, Math.max(moved, 0.03 * h)));
  }
  return { at: [x, y], value };
}
