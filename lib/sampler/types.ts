/** The vocabulary of the sampler. Pure: no framework, no I/O, no clock; randomness is always an argument. */

/** Source of random numbers; its whole state is plain data, so that a checkpoint can hold it. */
export interface Rng {
  /** Uniform on the open interval (0, 1), 53 bits. */
  uniform(): number;
  /** Standard normal. */
  normal(): number;
  /** Everything needed to go on byte-identically, spare normals included. Structured-cloneable. */
  state(): RngState;
}

export interface RngState {
  generator: unknown;
  /** A second normal left over by the pairwise method, or null. */
  spare: number | null;
}

/** What is sampled. Natural logs of normalised densities. */
export interface Target {
  /** Names of the sampled parameters, in order. */
  readonly names: readonly string[];
  /** For each parameter the period of the circle it lives on, or null. A circular coordinate is kept in (−period/2, period/2]. */
  readonly periods: readonly (number | null)[];
  /** ln prior; −Infinity outside the support. Never NaN. */
  logPrior(x: Float64Array): number;
  /** ln likelihood; called only where the prior is finite. A NaN stops the run with a SamplerError. */
  logLikelihood(x: Float64Array): number;
  /** One independent draw from the prior into `out`. */
  drawPrior(rng: Rng, out: Float64Array): void;
}

/**
 * A proposal that the jump move is given; the sampler doesn't know where it comes from.
 * It is a fixed function of the frozen snapshot (no state of its own).
 */
export interface JumpProposal {
  readonly name: string;
  /** Writes a proposed point into `out`; `from` is the present point. */
  draw(rng: Rng, from: Float64Array, out: Float64Array): void;
  /** ln density of proposing `to` when at `from`, up to a constant that is the same for every pair. −Infinity where impossible. */
  logDensity(to: Float64Array, from: Float64Array): number;
}

export interface SamplerSettings {
  /** Recorded draws of warm-up; adaptation ends with the last of them. */
  warmup: number;
  /** Blocks of parameters (indices) that the random walk also moves one at a time. */
  blocks: readonly (readonly number[])[];
  /**
   * After warm-up the walks are made on every `walkEvery`-th draw only (default 1: on every draw). Needs a jump. Where the jumps
   * alone move the chain well, evaluations are better spent on them.
   */
  walkEvery?: number;
}

/** Acceptance of one move, counted since the end of warm-up (during warm-up: since the start). */
export interface MoveCount {
  name: string;
  proposed: number;
  accepted: number;
}

/** The whole state of one replica: structured-cloneable plain data (numbers, strings, arrays, typed arrays). */
export interface ReplicaState {
  version: 1;
  replica: number;
  /** Recorded draws so far, warm-up included. */
  draws: number;
  warmup: number;
  x: Float64Array;
  logLikelihood: number;
  logPrior: number;
  rng: RngState;
  moves: MoveCount[];
  /** Each move's own state by name (adapted covariances, scales, running sums). */
  moveState: Record<string, unknown>;
}

/** A block of recorded draws of one replica, in the order they were made. */
export interface DrawBlock {
  replica: number;
  /** Number of the first draw, counted from the start of warm-up. */
  first: number;
  count: number;
  /** Values a draw: 2 + dimension: ln likelihood, ln prior, then the sampled parameters. Row-major. */
  width: number;
  values: Float64Array;
}
