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
  /**
   * The likelihood that evidences are of, where it is another one: its ln is `offset + exponent × ln likelihood`. Left out: the
   * same, exponent 1 and offset 0.
   */
  readonly evidence?: { readonly exponent: number; readonly offset: number };
}

/**
 * A proposal that the jump move is given; the sampler doesn't know where it comes from.
 * It is a fixed function of the frozen snapshot (no state of its own).
 */
export interface JumpProposal {
  readonly name: string;
  /** Writes a proposed point into `out`; `from` is the present point. */
  draw(rng: Rng, from: Float64Array, out: Float64Array): void;
  /**
   * True where `logDensity` is normalised (∫ over `to` is 1) and doesn't depend on `from`: then the evidence follows from the jumps.
   */
  readonly normalised?: boolean;
  /** ln density of proposing `to` when at `from`, up to a constant that is the same for every pair. −Infinity where impossible. */
  logDensity(to: Float64Array, from: Float64Array): number;
}

export interface SamplerSettings {
  /** Recorded draws of warm-up; adaptation ends with the last of them. */
  warmup: number;
  /** Blocks of parameters (indices) that the random walk also moves one at a time. */
  blocks: readonly (readonly number[])[];
  /**
   * After warm-up walks and differential evolution are made on every `walkEvery`-th draw only (default 1: on every draw), where at
   * least 30 % of the jumps of warm-up were accepted, and more seldom by the number of jumps accepted for one rejected, up to 20. Needs
   * a jump. Where the jumps alone move the chain well, evaluations are better spent on them.
   */
  walkEvery?: number;
  /** Differential evolution from the replica's own archive, after warm-up. Default: none. */
  differential?: boolean;
  /** A ladder of temperatures beside the chain. Default: none. */
  ladder?: LadderSettings;
}

/** A ladder between the prior (β = 0) and the posterior (β = 1). */
export interface LadderSettings {
  /** Recorded draws between two steps of the ladder in warm-up. */
  everyInWarmup: number;
  /** The same after warm-up. */
  every: number;
  /**
   * The same where a normalised jump does what the ladder is for, that is, moves the chain and gives the evidence: at least 30 % of the
   * jumps of warm-up were accepted. Longer by the number of jumps accepted for one rejected, up to 20. In warm-up, once that shows, a
   * tenth of it.
   */
  everyWhereJumpsDo: number;
  /** Rungs at most, both ends counted; at least 3. */
  maxRungs: number;
  /** Swaps that may be rejected, from 0 to 1: rungs are added until no more are, or there are `maxRungs`. */
  rejection: number;
}

/** Everything a random walk remembers: plain data. Matrices are row-major, lower triangles. */
export interface RandomWalkState {
  /** The parameters that it moves. */
  indices: Int32Array;
  /** Cholesky factor of the covariance that gives the steps their shape. */
  factor: Float64Array;
  /** ln of the factor's multiplier. */
  logScale: number;
  /** Robbins–Monro steps, from which the gain follows. */
  gainSteps: number;
  /** Average of logScale since the last change of shape (Polyak and Juditsky 1992), later steps weighing more. */
  averageLogScale: number;
  /** Draws in the present window, and how many of them differ from the one before. */
  count: number;
  moved: number;
  /** First draw of the window; what follows is relative to it, so that a large offset costs no digits. */
  origin: Float64Array;
  last: Float64Array;
  mean: Float64Array;
  scatter: Float64Array;
}

/** A rung's point with its natural-log densities; at the prior the likelihood may be 0. */
export interface RungPoint {
  x: Float64Array;
  logPrior: number;
  logLikelihood: number;
}

/** Everything the ladder remembers: plain data. Rung 0 is the prior, the last one the chain itself, whose point isn't here. */
export interface LadderState {
  /** Inverse temperatures, from 0 to 1, rising. */
  betas: Float64Array;
  /** Points of all rungs but the last. */
  points: RungPoint[];
  /** Walks of the rungs between the ends: rung k has walk k − 1. */
  walks: RandomWalkState[];
  /** Steps since the ladder was last changed; even ones try pairs 0–1, 2–3 …, odd ones 1–2, 3–4 …. */
  steps: number;
  /** Sums of rejection probabilities of the swaps between rung k and k + 1 since then, and how many there were. */
  rejections: Float64Array;
  tries: Float64Array;
  /** For the walker that is now on each rung, which end it has seen last and whether it came there from the other one. */
  walkers: Uint8Array;
  /** Ways from the chain to the prior and back, since the end of warm-up. */
  roundTrips: number;
  /** Recorded draws between two steps. */
  every: number;
  /** Sums for the evidence since the end of warm-up; null before, and where the jumps give it. */
  stones: LogSums | null;
}

/** ln of sums of several quantities, in batches of equal length. */
export interface LogSums {
  /** Quantities summed side by side. */
  quantities: number;
  /** ln of the sum by batch, then quantity; complete batches first, the one under way behind them. */
  logs: Float64Array;
  /** Entries of a complete batch. */
  length: number;
  /** Complete batches. */
  filled: number;
  /** Entries of the batch under way. */
  count: number;
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
  /**
   * How many times as long as the settings say the other moves sit out: the number of accepted jumps of warm-up for one that was
   * rejected. Set at its end; absent where too few were accepted for that.
   */
  rest?: number;
  /** Null or absent where there is none. */
  ladder?: LadderState | null;
  /** Sums for the evidence from a normalised jump, since the end of warm-up, where that does what the ladder is for; else absent. */
  stones?: LogSums;
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
