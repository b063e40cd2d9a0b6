/**
 * How far in κ the leading squeezed template holds. The exact oscillating part is the leading one times
 * F = 1 + c κ² + …, so it holds to ε of its envelope up to κ = √(ε/|c|). Derived by us; `tests` hold it to the
 * values of the full hypergeometric factor.
 */

/** |c| of vertex 1 or 2: V1 (5/2+s)(7/2+s)/(16(1+s)); V2 (1/2+s)(7/2+s)(13/2+s)/(16(1+s)(9/2+s)) − 1/2; s = iμ. */
export function leadingCorrection(mu: number, vertex: 1 | 2): number {
  const times = (z: [number, number], re: number): [number, number] => [
    z[0] * re - z[1] * mu,
    z[1] * re + z[0] * mu,
  ];
  const over = (z: [number, number], re: number): [number, number] => {
    const size = re * re + mu * mu;
    return [(z[0] * re + z[1] * mu) / size, (z[1] * re - z[0] * mu) / size];
  };
  const start: [number, number] = [1 / 16, 0];
  const c: [number, number] =
    vertex === 1
      ? over(times(times(start, 2.5), 3.5), 1)
      : over(over(times(times(times(start, 0.5), 3.5), 6.5), 1), 4.5);
  return vertex === 1 ? Math.hypot(...c) : Math.hypot(c[0] - 0.5, c[1]);
}

/** Highest κ to which every mass from `lo` to `hi` keeps within `share` of its envelope, for the vertices that are possible. */
export function accurateKappa(lo: number, hi: number, share: number, vertices: readonly (1 | 2)[]): number {
  let worst = 0;
  for (let i = 0; i <= 40; i += 1) {
    const mu = lo + ((hi - lo) * i) / 40;
    for (const vertex of vertices) worst = Math.max(worst, leadingCorrection(mu, vertex));
  }
  return Math.sqrt(share / worst);
}

/** Fitted background powers that keep the bias of masses up to `mu` near 1 %: 2 up to μ = 2, 3 up to 4, 4 beyond. */
export function backgroundTermsFor(mu: number): number {
  return mu <= 2 ? 2 : mu <= 4 ? 3 : 4;
}
