import FFT from 'fft.js';

export interface SpectralWindow {
  /** Frequencies (conjugate to ln κ, as μ is). */
  mu: Float64Array;
  /** |Σ_j w_j exp(i μ x_j)|² / (Σ w_j)², 1 at μ = 0. */
  power: Float64Array;
}

/** How far a step may be from the mean one, as a part of it, to count as regular. */
const REGULAR = 1e-9;
/** Padding of the transform: points between 0 and the first independent frequency. */
const PADDING = 16;

/**
 * The spectral window of samples at `x` (here ln κ) with weights `w` (here 1/σ²): what one pure tone looks like from where the data
 * are. On a regular grid by a padded fast Fourier transform, read at its own frequencies; else by the direct sum at `points`
 * frequencies from 0 to `highest`.
 */
export function spectralWindow(
  x: ArrayLike<number>,
  w: ArrayLike<number>,
  highest: number,
  points = 600,
): SpectralWindow {
  const n = x.length;
  const step = (x[n - 1] - x[0]) / (n - 1);
  let regular = n > 2;
  for (let j = 1; j < n && regular; j += 1) regular = Math.abs(x[j] - x[j - 1] - step) < REGULAR * step;
  let total = 0;
  for (let j = 0; j < n; j += 1) total += w[j];
  if (regular) {
    let size = 2;
    while (size < PADDING * n) size *= 2;
    const fft = new FFT(size);
    const padded = new Array<number>(size).fill(0);
    for (let j = 0; j < n; j += 1) padded[j] = w[j] / total;
    const out = fft.createComplexArray();
    fft.realTransform(out, padded);
    fft.completeSpectrum(out);
    const spacing = (2 * Math.PI) / (size * step);
    const count = Math.floor(highest / spacing) + 1;
    const mu = Float64Array.from({ length: count }, (_, k) => k * spacing);
    const power = mu.map((_, k) => out[2 * (k % size)] ** 2 + out[2 * (k % size) + 1] ** 2);
    return { mu, power };
  }
  const mu = Float64Array.from({ length: points }, (_, k) => (highest * k) / (points - 1));
  const power = mu.map((frequency) => {
    let re = 0;
    let im = 0;
    for (let j = 0; j < n; j += 1) {
      re += (w[j] / total) * Math.cos(frequency * x[j]);
      im += (w[j] / total) * Math.sin(frequency * x[j]);
    }
    return re * re + im * im;
  });
  return { mu, power };
}

/**
 * Where a tone of frequency μ shows again when ln κ is sampled in steps D: |μ − 2πn/D| for n ≥ 1 and μ + 2πn/D, within [lo, hi],
 * ascending. Bins suppress an alias, by the sinc of half a bin, and don't remove it.
 */
export function aliasesOf(mu: number, spacing: number, lo: number, hi: number): number[] {
  const turn = (2 * Math.PI) / spacing;
  const found: number[] = [];
  for (let n = 1; n <= Math.ceil((hi + mu) / turn) && n < 1000; n += 1) {
    for (const at of [Math.abs(mu - n * turn), mu + n * turn]) if (at >= lo && at <= hi) found.push(at);
  }
  return found.sort((a, b) => a - b);
}
