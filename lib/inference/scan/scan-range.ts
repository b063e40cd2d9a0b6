import type { ParameterDeclaration, Prior } from '@/lib/templates';
import { isScalarPrior, priorMoments, priorSupport } from '../priors';

/** Sds of a prior without ends that a scan reaches to. */
const REACH = 4;
/** Where a scan begins at the earliest where μ = 0 itself is excluded. */
const FIRST = 0.01;

export interface ScanRange {
  /** Reach of the masses' priors within the template's own range; infinite where every mass is fixed. */
  lo: number;
  hi: number;
  /** Ends that no scan may leave. */
  least: number;
  most: number;
}

/**
 * From where to where a scan of `masses` goes unless told: the ends of their priors, four sds about the mean where a prior has
 * none, within the template's own range. Null without a mass.
 */
export function scanRange(
  masses: readonly ParameterDeclaration[],
  priors: Readonly<Record<string, Prior>>,
): ScanRange | null {
  if (masses.length === 0) return null;
  const [declared] = masses;
  const [first, most] = declared.range;
  const least = declared.exclusiveMinimum ? Math.max(first, FIRST) : first;
  let [lo, hi] = [Infinity, -Infinity];
  for (const { name } of masses) {
    const prior = priors[name];
    if (!prior || !isScalarPrior(prior)) continue;
    const { mean, sd } = priorMoments(prior);
    const [from, to] = priorSupport(prior);
    lo = Math.min(lo, Number.isFinite(from) ? from : mean - REACH * sd);
    hi = Math.max(hi, Number.isFinite(to) ? to : mean + REACH * sd);
  }
  const free = lo <= hi;
  return {
    lo: free ? Math.max(least, Math.min(lo, most)) : Infinity,
    hi: free ? Math.min(most, hi) : Infinity,
    least,
    most,
  };
}
