import type { LinearPrior } from './linear-prior';
import type { Design } from './moments';

/** A way to hang flat coefficients on the fields' columns, over which the likelihood is maximised. */
export interface ProfileDesign {
  readonly design: Design;
  /** True where the design's two coefficients must have the same sign: g w_1 and g w_2. */
  readonly sameSign: boolean;
}

/** One node of the integral over what isn't linear, with the priors of the linear coefficients there. */
export interface EvidenceDesign {
  readonly design: Design;
  readonly priors: readonly LinearPrior[];
  /** ln of the node's weight times the prior of what stands at it. */
  readonly logWeight: number;
}

/** How the fields' parameters make the coefficients of their raw columns, at given masses. */
export interface Coordinates {
  /** Degrees of freedom of Δχ² at fixed masses: flat coefficients that the fields add; null where it isn't linear. */
  readonly freedom: number | null;
  profile(masses: ArrayLike<number>): ProfileDesign[];
  /**
   * Nodes of the quadrature over phases and angles with the priors given; null where there are too many of them.
   * `sharpness`: √Δχ² of the field; the higher, the finer.
   */
  evidence(masses: ArrayLike<number>, sharpness: number): EvidenceDesign[] | null;
}

export function identityDesign(size: number): Design {
  const matrix = new Float64Array(size * size);
  for (let i = 0; i < size; i += 1) matrix[i * size + i] = 1;
  return { raw: size, count: size, matrix, offset: null };
}

/** Every raw column has a coefficient of its own, with these priors (none: only the profile is asked for). */
export function freeCoordinates(columns: number, priors: readonly LinearPrior[] | null): Coordinates {
  const design = identityDesign(columns);
  const profile = [{ design, sameSign: false }];
  const evidence = priors && [{ design, priors, logWeight: 0 }];
  return { freedom: columns, profile: () => profile, evidence: () => evidence };
}
