import { TemplateError, quoteValue } from './errors';

/**
 * How N mass eigenstates share the one coupling: the flavour that couples is F₁ = Σ O_{1i} σ_i, so single exchange
 * sees the weights w_i = O_{1i}², which add up to one. Angles in radians; all of them in [0, π/2] reach every weight.
 *
 * - N = 1: no angle, w = (1).
 * - N = 3: `theta12, theta13` in the standard rotation, w = (c12² c13², s12² c13², s13²).
 * - else hyperspherical a_1 … a_{N−1}: w_1 = cos² a_1, w_2 = sin² a_1 cos² a_2, …, w_N = Π sin² a_j.
 */

/**
 * Weights from the N − 1 mixing angles, into `out` (length N) if given. No allocation with `out`. Any real angles.
 */
export function mixingWeights(angles: ArrayLike<number>, out?: Float64Array): Float64Array {
  const n = angles.length + 1;
  const w = out ?? new Float64Array(n);
  if (n === 3) {
    const c12 = Math.cos(angles[0]);
    const s12 = Math.sin(angles[0]);
    const c13 = Math.cos(angles[1]);
    const s13 = Math.sin(angles[1]);
    w[0] = c12 * c12 * c13 * c13;
    w[1] = s12 * s12 * c13 * c13;
    w[2] = s13 * s13;
    return w;
  }
  let rest = 1;
  for (let i = 0; i < n - 1; i += 1) {
    const c = Math.cos(angles[i]);
    const s = Math.sin(angles[i]);
    w[i] = rest * c * c;
    rest *= s * s;
  }
  w[n - 1] = rest;
  return w;
}

/**
 * The N − 1 angles in [0, π/2] that give these weights; the inverse of `mixingWeights`. Where a weight of zero leaves
 * an angle undetermined the angle is 0. Throws TemplateError `invalid_weights` unless every w_i ≥ 0 and |Σ w − 1| ≤ 1e-9.
 */
export function anglesFromWeights(weights: ArrayLike<number>, out?: Float64Array): Float64Array {
  const n = weights.length;
  let sum = 0;
  for (let i = 0; i < n; i += 1) {
    if (!(weights[i] >= 0)) {
      throw new TemplateError(
        'invalid_weights',
        `weights[${i}]`,
        `weight ${quoteValue(weights[i])} is not a number ≥ 0`,
      );
    }
    sum += weights[i];
  }
  if (!(Math.abs(sum - 1) <= 1e-9)) {
    throw new TemplateError(
      'invalid_weights',
      'weights',
      `the weights add up to ${sum}; they must add up to 1`,
    );
  }
  const angles = out ?? new Float64Array(n - 1);
  if (n === 3) {
    angles[0] = Math.atan2(Math.sqrt(weights[1]), Math.sqrt(weights[0]));
    angles[1] = Math.atan2(Math.sqrt(weights[2]), Math.sqrt(weights[0] + weights[1]));
    return angles;
  }
  let rest = weights[n - 1];
  for (let i = n - 2; i >= 0; i -= 1) {
    angles[i] = Math.atan2(Math.sqrt(rest), Math.sqrt(weights[i]));
    rest += weights[i];
  }
  return angles;
}

/**
 * |∂(w_1 … w_{N−1}) / ∂(angles)|: sin 2θ for N = 2, 4 |s12 c12 s13| |c13|³ for N = 3, and in general for
 * hyperspherical angles Π_k 2 |s_k|^{2(N−k)−1} |c_k|. 1 for N = 1. Dimensionless (angles in radians).
 */
export function anglesJacobian(angles: ArrayLike<number>): number {
  const n = angles.length + 1;
  if (n === 3) {
    const c13 = Math.cos(angles[1]);
    return 4 * Math.abs(Math.sin(angles[0]) * Math.cos(angles[0]) * Math.sin(angles[1]) * c13 * c13 * c13);
  }
  let jacobian = 1;
  for (let k = 1; k < n; k += 1) {
    const s = Math.abs(Math.sin(angles[k - 1]));
    jacobian *= 2 * Math.abs(Math.cos(angles[k - 1])) * s ** (2 * (n - k) - 1);
  }
  return jacobian;
}

/** ln[2^{N−1} Γ(N/2) π^{−N/2}]: the constants of the isotropic densities on [0, π/2]^{N−1} for N = 1 … 4. */
const LOG_NORMALISATION: Readonly<Record<number, number>> = {
  1: 0,
  2: Math.log(2 / Math.PI),
  3: Math.log(2 / Math.PI),
  4: Math.log(8 / (Math.PI * Math.PI)),
};

/**
 * ln of the density of the angles when (O_11 … O_1N) is uniform on the sphere (Haar), folded to [0, π/2] and
 * normalised there: N = 2: 2/π; N = 3: (2/π) cos θ13; N = 4: (8/π²) sin² a_1 sin a_2. The weights are then
 * Dirichlet(½, …, ½). −Infinity outside [0, π/2]. Throws TemplateError `invalid_angles` beyond four fields.
 */
export function logIsotropicDensity(angles: ArrayLike<number>): number {
  const n = angles.length + 1;
  const constant = LOG_NORMALISATION[n];
  if (constant === undefined) {
    throw new TemplateError(
      'invalid_angles',
      'angles',
      `${n} fields are not supported; give 0 to 3 mixing angles`,
    );
  }
  for (let i = 0; i < n - 1; i += 1) {
    if (!(angles[i] >= 0 && angles[i] <= Math.PI / 2)) return -Infinity;
  }
  if (n === 3) return constant + Math.log(Math.cos(angles[1]));
  if (n === 4) return constant + 2 * Math.log(Math.sin(angles[0])) + Math.log(Math.sin(angles[1]));
  return constant;
}

/**
 * Density of mixing angle `index` (from 0) alone under the isotropic density of N fields, the others integrated out: N = 2:
 * 2/π; N = 3: θ12 2/π, θ13 cos θ13; N = 4: (4/π) sin² a_1, sin a_2, 2/π. 0 outside [0, π/2]. Throws TemplateError
 * `invalid_angles` beyond four fields.
 */
export function isotropicMarginal(fields: number, index: number, angle: number): number {
  if (!(fields >= 2 && fields <= 4 && index >= 0 && index < fields - 1)) {
    throw new TemplateError('invalid_angles', 'angles', `angle ${index} of ${fields} fields has no density`);
  }
  if (!(angle >= 0 && angle <= Math.PI / 2)) return 0;
  if (fields === 3 && index === 1) return Math.cos(angle);
  if (fields === 4 && index === 0) return (4 / Math.PI) * Math.sin(angle) ** 2;
  if (fields === 4 && index === 1) return Math.sin(angle);
  return 2 / Math.PI;
}

/**
 * One draw of the N − 1 angles from the isotropic density, into `out` (length N − 1, N = 1 … 4), from independent
 * uniforms on (0, 1). N = 2: θ uniform. N = 3: sin θ13 uniform. N = 4: the point on the sphere S³ by two uniform
 * azimuths and a uniform split B between the first and the second pair of components.
 */
export function drawIsotropicAngles(uniform: () => number, out: Float64Array): void {
  const quarter = Math.PI / 2;
  if (out.length === 0) return;
  if (out.length === 1) {
    out[0] = quarter * uniform();
  } else if (out.length === 2) {
    out[0] = quarter * uniform();
    out[1] = Math.asin(uniform());
  } else if (out.length === 3) {
    const split = uniform();
    const first = quarter * uniform();
    const second = quarter * uniform();
    const pair = Math.sqrt(1 - split);
    out[2] = second;
    out[1] = Math.atan2(pair, Math.sqrt(split) * Math.sin(first));
    out[0] = Math.atan2(
      Math.hypot(pair, Math.sqrt(split) * Math.sin(first)),
      Math.sqrt(split) * Math.cos(first),
    );
  } else {
    throw new TemplateError(
      'invalid_angles',
      'out',
      `${out.length} angles are not supported; give room for 0 to 3`,
    );
  }
}
