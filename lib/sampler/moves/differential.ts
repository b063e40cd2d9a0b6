/**
 * Differential evolution from the replica's own past: ter Braak and Vrugt (2008), "Differential Evolution Markov Chain with snooker
 * updater and fewer chains", Statistics and Computing 18, 435, https://doi.org/10.1007/s11222-008-9104-9.
 *
 *     x' = x + γ (z₁ − z₂) + e,   γ = 2.38/√(2d), every tenth time 1,   e ~ N(0, (10⁻³ sd)²) a coordinate
 *
 * z₁ and z₂ are two different entries of an archive of draws of the second half of warm-up, which is frozen then: the step is
 * symmetric and leaves the target unchanged exactly. Nothing comes from other replicas. With γ = 1 it leads from mode to mode
 * where the archive holds both. On circles the difference is the short way round.
 */
import { evaluate, wrap } from '../point';
import type { Candidate, Point } from '../point';
import type { Rng, Target } from '../types';
import { decide } from './accept';

/** Draws that the archive holds at most. */
const PLACES = 200;
const JITTER = 1e-3;
const MODE_SHARE = 0.1;

/** Everything that the move remembers: plain data. */
export interface DifferentialState {
  /** Draws one after the other. */
  archive: Float64Array;
  /** How many there are. */
  size: number;
  /** Sd of the small step in each coordinate; 0 until the archive is frozen. */
  jitter: Float64Array;
}

/** An empty archive. */
export function initDifferential(dimension: number): DifferentialState {
  return { archive: new Float64Array(PLACES * dimension), size: 0, jitter: new Float64Array(dimension) };
}

/** Takes draw `draw` of warm-up into the archive if it is one of those, evenly spread over the second half, that are kept. */
export function remember(state: DifferentialState, x: Float64Array, draw: number, warmup: number): void {
  const half = Math.floor(warmup / 2);
  const stride = Math.max(1, Math.ceil((warmup - half) / PLACES));
  if (draw <= half || (draw - half) % stride !== 0 || state.size === PLACES) return;
  state.archive.set(x, state.size * x.length);
  state.size++;
}

/** Ends the archive: the small steps get their sizes. */
export function freezeArchive(state: DifferentialState, periods: Target['periods']): void {
  const { archive, size, jitter } = state;
  const d = jitter.length;
  for (let i = 0; i < d && size > 1; i++) {
    // Half the mean square difference of neighbours in a cycle: right on circles too.
    let squares = 0;
    for (let k = 0; k < size; k++) {
      const other = (k + (size >> 1)) % size;
      squares += difference(archive[k * d + i], archive[other * d + i], periods[i]) ** 2;
    }
    jitter[i] = JITTER * Math.sqrt(squares / (2 * size));
  }
}

/** Whether the archive has enough entries to propose from. */
export function canPropose({ size, jitter }: DifferentialState): boolean {
  return size > 2 * jitter.length;
}

/** One step; tells whether it was accepted. */
export function stepDifferential(
  rng: Rng,
  target: Target,
  point: Point,
  candidate: Candidate,
  state: DifferentialState,
): boolean {
  const { archive, size, jitter } = state;
  const d = jitter.length;
  const first = Math.floor(size * rng.uniform());
  const second = (first + 1 + Math.floor((size - 1) * rng.uniform())) % size;
  const gamma = rng.uniform() < MODE_SHARE ? 1 : 2.38 / Math.sqrt(2 * d);
  for (let i = 0; i < d; i++) {
    const period = target.periods[i];
    const step = difference(archive[first * d + i], archive[second * d + i], period);
    const moved = point.x[i] + gamma * step + jitter[i] * rng.normal();
    candidate.x[i] = period === null ? moved : wrap(moved, period);
  }
  if (!evaluate(target, candidate)) return false;
  const logRatio = candidate.logPrior - point.logPrior + (candidate.logLikelihood - point.logLikelihood);
  return decide(rng, point, candidate, logRatio);
}

function difference(a: number, b: number, period: number | null): number {
  return period === null ? a - b : wrap(a - b, period);
}
