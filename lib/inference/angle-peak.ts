/** Where the conditional of the mixing angle of two fields is highest, and how far round it that reaches (radians). */
export interface AnglePeak {
  angle: number;
  reach: number;
}

/**
 * Writes the angle θ at which g (cos²θ, sin²θ) fits best and four sds of it under the normal approximation, from the Gram
 * matrix (2 × 2, row-major) and the products with the data of the two fields' signals; `g` is NaN where it is free. False where
 * the best weights lie outside [0, 1] or aren't determined.
 */
export function findAnglePeak(gram: Float64Array, linear: Float64Array, g: number, out: AnglePeak): boolean {
  const [aa, ab, bb] = [gram[0], gram[1], gram[3]];
  let weight: number;
  let variance: number;
  if (Number.isNaN(g)) {
    const determinant = aa * bb - ab * ab;
    if (!(determinant > 1e-9 * aa * bb)) return false;
    const first = (bb * linear[0] - ab * linear[1]) / determinant;
    const second = (aa * linear[1] - ab * linear[0]) / determinant;
    const sum = first + second;
    weight = first / sum;
    // dw = (second · dfirst − first · dsecond)/sum².
    variance =
      (second * second * bb + 2 * first * second * ab + first * first * aa) / (determinant * sum ** 4);
  } else {
    const curvature = aa - 2 * ab + bb;
    weight = ((linear[0] - linear[1]) / g + bb - ab) / curvature;
    variance = 1 / (g * g * curvature);
  }
  if (!(weight > 0 && weight < 1 && variance > 0)) return false;
  out.angle = Math.acos(Math.sqrt(weight));
  out.reach = (2 * Math.sqrt(variance)) / Math.sqrt(weight * (1 - weight));
  return true;
}
