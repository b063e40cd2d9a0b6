/**
 * The logarithm of the Gamma function of a complex argument.
 *
 * Method: the recurrence Γ(z+1) = z Γ(z) carries z to where |z| ≥ 10 and Re z ≥ 0; there Stirling's series
 * ln Γ(z) = (z − ½) ln z − z + ½ ln 2π + Σ B_{2k} / (2k (2k−1) z^{2k−1}) with eight terms is exact to rounding
 * (Abramowitz and Stegun 6.1.15 and 6.1.40; from memory). The coefficients are those ratios of Bernoulli numbers.
 */

const HALF_LN_TWO_PI = 0.9189385332046727;

const STIRLING = [
  1 / 12,
  -1 / 360,
  1 / 1260,
  -1 / 1680,
  1 / 1188,
  -691 / 360360,
  1 / 156,
  -3617 / 122400,
] as const;

/**
 * ln Γ(re + i·im), written into `out[0]` (real part) and `out[1]` (imaginary part).
 *
 * The imaginary part is the continuous one: 0 on the positive axis and without jumps of 2π away from the negative
 * axis, where the value is the limit from above. Range: Re z ≥ −20, any Im z. Accuracy: 1e-13 relative to |ln Γ| or
 * absolute, whichever is larger. At a pole (z = 0, −1, −2, …) the real part is +Infinity.
 */
export function complexLogGamma(re: number, im: number, out: Float64Array): void {
  // ln Γ(z*) = (ln Γ(z))*: work in the upper half plane, where every factor of the recurrence turns one way.
  const y = Math.abs(im);
  let x = re;
  let productRe = 1;
  let productIm = 0;
  let halfTurns = 0;
  while (x < 0 || x * x + y * y < 100) {
    const nextRe = productRe * x - productIm * y;
    const nextIm = productRe * y + productIm * x;
    productRe = nextRe;
    productIm = nextIm;
    // Keep the product's angle in [0, π) and count the half turns, so that the total angle has no jump.
    if (productIm < 0 || (productIm === 0 && productRe < 0)) {
      productRe = -productRe;
      productIm = -productIm;
      halfTurns += 1;
    }
    x += 1;
  }
  const square = x * x + y * y;
  const logAbs = 0.5 * Math.log(square);
  const angle = Math.atan2(y, x);
  const inverseRe = x / square;
  const inverseIm = -y / square;
  const squareRe = inverseRe * inverseRe - inverseIm * inverseIm;
  const squareIm = 2 * inverseRe * inverseIm;
  let seriesRe = 0;
  let seriesIm = 0;
  for (let k = STIRLING.length - 1; k >= 0; k -= 1) {
    const nextRe = seriesRe * squareRe - seriesIm * squareIm + STIRLING[k];
    seriesIm = seriesRe * squareIm + seriesIm * squareRe;
    seriesRe = nextRe;
  }
  const tailRe = seriesRe * inverseRe - seriesIm * inverseIm;
  const tailIm = seriesRe * inverseIm + seriesIm * inverseRe;
  const logProduct = 0.5 * Math.log(productRe * productRe + productIm * productIm);
  const productAngle = halfTurns * Math.PI + Math.atan2(productIm, productRe);
  out[0] = (x - 0.5) * logAbs - y * angle - x + HALF_LN_TWO_PI + tailRe - logProduct;
  const imaginary = (x - 0.5) * angle + y * logAbs - y + tailIm - productAngle;
  out[1] = im < 0 ? -imaginary : imaginary;
}
