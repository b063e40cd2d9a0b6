/** Far below rounding for a matrix with elements near 1, and 1 over it is finite. */
const SMALLEST_PIVOT = 1e-300;

/** Smallest and largest eigenvalue. */
export interface ExtremeEigenvalues {
  smallest: number;
  largest: number;
}

/**
 * Smallest and largest eigenvalue of a symmetric p × p matrix (row-major, p ≥ 1, finite elements), without eigenvectors:
 * Householder reduction to tridiagonal form, ⅔p³ products, and bisection on the number of negative pivots of T − x
 * (J. W. Demmel, Applied Numerical Linear Algebra, 1997, sections 4.4.7 and 5.3.4). Error of order p·2⁻⁵²·‖matrix‖.
 */
export function extremeEigenvalues(matrix: Float64Array, p: number): ExtremeEigenvalues {
  const scale = matrix.reduce((largest, value) => Math.max(largest, Math.abs(value)), 0);
  if (scale === 0) return { smallest: 0, largest: 0 };
  // Elements near 1, so that no square of them leaves the range of doubles.
  const { diagonal, squares } = tridiagonalise(
    matrix.map((value) => value / scale),
    p,
  );
  return {
    smallest: scale * largestWithAtMost(0, diagonal, squares),
    largest: scale * largestWithAtMost(p - 1, diagonal, squares),
  };
}

interface Tridiagonal {
  diagonal: Float64Array;
  /** Squares of the elements beside the diagonal; the first is 0. */
  squares: Float64Array;
}

/** Reduces the lower triangle of `a` in place, last row first: reflections then run along rows, as the matrix is stored. */
function tridiagonalise(a: Float64Array, p: number): Tridiagonal {
  const squares = new Float64Array(p);
  const w = new Float64Array(p);
  for (let k = p - 1; k > 0; k -= 1) {
    // Row k left of the diagonal becomes (0, …, 0, ∓norm).
    const v = a.subarray(k * p, k * p + k);
    let beyond = 0;
    for (let j = 0; j < k - 1; j += 1) beyond += v[j] * v[j];
    squares[k] = beyond + v[k - 1] * v[k - 1];
    if (beyond === 0) continue;
    const norm = Math.sqrt(squares[k]);
    const pivot = v[k - 1];
    v[k - 1] = pivot + (pivot < 0 ? -norm : norm);
    // I − v·vᵀ/h with h = |v|²/2.
    const h = squares[k] + Math.abs(pivot) * norm;
    reflect(a, p, v, h, w);
  }
  return { diagonal: Float64Array.from({ length: p }, (_, i) => a[i * p + i]), squares };
}

/** The leading block of the length of v becomes H·A·H = A − v·wᵀ − w·vᵀ, w = A·v/h − v·(vᵀ·A·v)/2h². */
function reflect(a: Float64Array, p: number, v: Float64Array, h: number, w: Float64Array): void {
  const k = v.length;
  w.fill(0, 0, k);
  for (let i = 0; i < k; i += 1) {
    const row = i * p;
    const vi = v[i];
    let sum = a[row + i] * vi;
    for (let j = 0; j < i; j += 1) {
      sum += a[row + j] * v[j];
      w[j] += a[row + j] * vi;
    }
    w[i] += sum;
  }
  let product = 0;
  for (let i = 0; i < k; i += 1) product += v[i] * w[i];
  const share = product / (2 * h);
  for (let i = 0; i < k; i += 1) w[i] = (w[i] - share * v[i]) / h;
  for (let i = 0; i < k; i += 1) {
    const row = i * p;
    const [vi, wi] = [v[i], w[i]];
    for (let j = 0; j <= i; j += 1) a[row + j] -= vi * w[j] + wi * v[j];
  }
}

/** How many eigenvalues are below x: the negative pivots of T − x. */
function countBelow(x: number, { diagonal, squares }: Tridiagonal): number {
  let count = 0;
  let pivot = 1;
  for (let i = 0; i < diagonal.length; i += 1) {
    pivot = diagonal[i] - x - squares[i] / pivot;
    if (pivot < 0) count += 1;
    // Nothing can't be divided by; moving the pivot by less than rounding does no harm.
    if (Math.abs(pivot) < SMALLEST_PIVOT) pivot = pivot < 0 ? -SMALLEST_PIVOT : SMALLEST_PIVOT;
  }
  return count;
}

/** The largest x with at most `count` eigenvalues below it, between Gershgorin's bounds, to the last bit. */
function largestWithAtMost(count: number, diagonal: Float64Array, squares: Float64Array): number {
  const tridiagonal = { diagonal, squares };
  let [low, high] = [Infinity, -Infinity];
  diagonal.forEach((value, i) => {
    const radius = Math.sqrt(squares[i]) + Math.sqrt(squares[i + 1] ?? 0);
    low = Math.min(low, value - radius);
    high = Math.max(high, value + radius);
  });
  for (;;) {
    const middle = low + (high - low) / 2;
    if (middle <= low || middle >= high) return countBelow(high, tridiagonal) <= count ? high : low;
    if (countBelow(middle, tridiagonal) <= count) low = middle;
    else high = middle;
  }
}
