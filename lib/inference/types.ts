import type { CompiledTemplate, ParameterDeclaration, Prior } from '@/lib/templates';
import type { JumpProposal, Target } from '@/lib/sampler';

export type LikelihoodKind = 'normal' | 'hartlap' | 'sellentin-heavens' | 'matched-t';

/** One of several measurements that stand one after the other in the data, independent of the others. */
export interface FitPart {
  /** Number of its values. */
  length: number;
  /** Number of mocks behind its covariance; null where that is taken as known. */
  mockCount: number | null;
}

/** What is fitted, after cuts. All dimensionless. */
export interface FitData {
  /** Measured shape function S (or what stands for it), length p. */
  S: Float64Array;
  /** Covariance of S, p × p row-major; the sample covariance (divisor N − 1) when it comes from N mocks. */
  covariance: Float64Array;
  /** Number of mocks behind the covariance; null where it is taken as known. */
  mockCount: number | null;
  /**
   * The independent measurements that the data consist of, where there are several whose covariances don't have one set of mocks behind
   * them: the likelihood is the product of theirs. The covariance is 0 between parts, `mockCount` null. Left out for one measurement.
   */
  parts?: readonly FitPart[];
  /** Known covariance of what the theory leaves out, p × p row-major, added to that of the data; left out for none. */
  theoryCovariance?: Float64Array;
}

export interface InferenceSpec {
  data: FitData;
  likelihood: LikelihoodKind;
  /** Compiled on the axis of the data after cuts. */
  template: CompiledTemplate;
  /** One prior for every parameter of the template, by name. */
  priors: Readonly<Record<string, Prior>>;
}

/** A posterior ready to be sampled. */
export interface Inference {
  target: Target;
  /** Spectral jumps for this template; empty for `background` without non-linear parameters is allowed. */
  jumps: JumpProposal[];
  /** Blocks of sampled parameters that belong together (a field's, the mixing, the background). */
  blocks: number[][];
  /** Declarations of the sampled (not fixed) parameters, in order. */
  sampled: ParameterDeclaration[];
  /** Full parameter vector (template order, fixed ones filled in) from a sampled one. */
  expand(x: ArrayLike<number>, out?: Float64Array): Float64Array;
  /** χ² of a sampled vector against the data with the covariance as given (no Hartlap factor). */
  chiSquare(x: Float64Array): number;
  /** ln of the probability that independent masses come in order: ln Z of the ordered prior. */
  logOrderProbability: number;
}
