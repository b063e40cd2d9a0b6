/**
 * Autocovariances by fast Fourier transform (Wiener–Khinchin), as far out as they are asked for.
 *
 * A chain is cut into pieces of L draws, each transformed at length 2L. With X_j the transform of piece j, the lags
 * below L are the inverse transform of Σ_j X_j* (X_j + (−1)^k X_{j+1}), since piece j followed by piece j + 1 has the transform
 * in brackets. With L ≥ N this is the usual zero-padded transform; with L ≪ N it is several times faster.
 */
import FFT from 'fft.js';

/** The first reach, in lags; it grows sixteenfold while more is asked for. Most chains end within it. */
const FIRST_REACH = 256;
const GROWTH = 16;

/** One plan is kept, since all chains of a fit have one length; it is a pure function of the size. */
let plan = new FFT(2 * FIRST_REACH);

function planFor(size: number): FFT {
  if (plan.size !== size) plan = new FFT(size);
  return plan;
}

/** Mean over `chains` (centred, n draws each) of the autocovariance with divisor n, at the lags 0 … reach − 1. */
function upTo(reach: number, chains: readonly Float64Array[], n: number): Float64Array {
  const size = 2 * reach;
  const fft = planFor(size);
  const data = new Float64Array(2 * size);
  let here = new Float64Array(2 * size);
  let next = new Float64Array(2 * size);
  const cross = new Float64Array(2 * size);
  // Two real chains travel as one complex one: the real part of its autocovariance is the sum of theirs.
  const transform = (one: Float64Array, two: Float64Array | null, start: number, out: Float64Array) => {
    const count = Math.max(0, Math.min(reach, n - start));
    data.fill(0);
    for (let i = 0; i < count; i++) {
      data[2 * i] = one[start + i];
      data[2 * i + 1] = two ? two[start + i] : 0;
    }
    fft.transform(out, data);
  };
  for (let pair = 0; pair < chains.length; pair += 2) {
    const one = chains[pair];
    const two = pair + 1 < chains.length ? chains[pair + 1] : null;
    transform(one, two, 0, here);
    for (let start = 0; start < n; start += reach) {
      const more = start + reach < n;
      if (more) transform(one, two, start + reach, next);
      for (let k = 0; k < size; k++) {
        const re = here[2 * k];
        const im = here[2 * k + 1];
        const sign = more ? ((k & 1) === 0 ? 1 : -1) : 0;
        const aheadRe = re + sign * next[2 * k];
        const aheadIm = im + sign * next[2 * k + 1];
        cross[2 * k] += re * aheadRe + im * aheadIm;
        cross[2 * k + 1] += re * aheadIm - im * aheadRe;
      }
      [here, next] = [next, here];
    }
  }
  fft.inverseTransform(here, cross);
  const result = new Float64Array(Math.min(reach, n));
  for (let lag = 0; lag < result.length; lag++) result[lag] = here[2 * lag] / (n * chains.length);
  return result;
}

/** Mean over chains of n draws each, already centred, of the autocovariance (divisor n), as a function of the lag < n. */
export function meanAutocovariance(centred: readonly Float64Array[], n: number): (lag: number) => number {
  let reach = FIRST_REACH;
  while (reach > 4 && reach / 2 >= n) reach /= 2;
  let known = upTo(reach, centred, n);
  return (lag) => {
    if (lag >= known.length && lag < n) {
      while (reach <= lag) reach *= GROWTH;
      while (reach / 2 >= n) reach /= 2;
      known = upTo(reach, centred, n);
    }
    return known[lag];
  };
}
