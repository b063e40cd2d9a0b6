import type { FieldKind } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import {
  areEqual,
  drawOrderedMasses,
  logOrderProbability,
  orderedMarginal,
  type MassPrior,
  type OrderedMarginal,
} from './ordered-masses';

/**
 * The fields of each kind (counted from 0) in the order in which their mass parameters ascend: μ ascends among heavy fields, ν
 * descends among light ones. Light ones first; a kind without a field is left out.
 */
export function massChains(kinds: readonly FieldKind[]): number[][] {
  const of = (kind: FieldKind) => kinds.flatMap((own, f) => (own === kind ? [f] : []));
  return [of('light').reverse(), of('heavy')].filter((chain) => chain.length > 0);
}

/**
 * What order leaves of each field's stated prior, a marginal a field: `orderedMarginal` within the field's own kind, since light
 * and heavy ones don't restrain each other. Null for a field that is alone of its kind, for a fixed mass, and where no order is
 * possible.
 */
export function inducedMarginals(
  kinds: readonly FieldKind[],
  priors: readonly MassPrior[],
): (OrderedMarginal | null)[] {
  const induced = kinds.map((): OrderedMarginal | null => null);
  for (const chain of massChains(kinds)) {
    if (chain.length < 2) continue;
    const own = chain.map((field) => priors[field]);
    chain.forEach((field, place) => (induced[field] = orderedMarginal(own, place)));
  }
  return induced;
}

/** Fields of one kind: which of all fields, in the order in which their parameters ascend. */
interface Group {
  fields: readonly number[];
  priors: readonly MassPrior[];
  equal: boolean;
  drawn: Float64Array;
}

/**
 * The order of the fields by mass: μ ascends among heavy fields, ν descends among light ones (a larger ν is a smaller mass),
 * and light stands before heavy whatever their values. The joint prior of the mass parameters is Π p_i · 1[in order]/Z; Z is
 * the product of both kinds' probabilities.
 */
export class MassOrder {
  /** ln Z; −Infinity where no order is possible. */
  readonly logProbability: number;
  private readonly groups: readonly Group[];

  /** One prior and one kind a field, light fields first. */
  constructor(
    private readonly kinds: readonly FieldKind[],
    priors: readonly MassPrior[],
  ) {
    this.groups = massChains(kinds).map((fields) => ({
      fields,
      priors: fields.map((f) => priors[f]),
      equal: areEqual(fields.map((f) => priors[f])),
      drawn: new Float64Array(fields.length),
    }));
    this.logProbability = this.groups.reduce((sum, own) => sum + logOrderProbability(own.priors), 0);
  }

  /** True if all fields are heavy, so that their parameters simply ascend. */
  get ascending(): boolean {
    return this.kinds.every((kind) => kind === 'heavy');
  }

  /** Whether the mass parameters, read field by field, are in order; no allocation. */
  holds(mass: (field: number) => number): boolean {
    for (const { fields } of this.groups) {
      for (let i = 1; i < fields.length; i += 1) {
        if (!(mass(fields[i]) > mass(fields[i - 1]))) return false;
      }
    }
    return true;
  }

  /** Whether fields a < b can be in order with their parameters in these intervals. */
  hasRoom(a: number, [loA, hiA]: readonly number[], b: number, [loB, hiB]: readonly number[]): boolean {
    if (this.kinds[a] !== this.kinds[b]) return true;
    return this.kinds[a] === 'heavy' ? loA < hiB : loB < hiA;
  }

  /** One exact draw from the joint prior, a value a field. */
  draw(rng: Rng, out: Float64Array): void {
    for (const { fields, priors, equal, drawn } of this.groups) {
      drawOrderedMasses(priors, rng, drawn, equal);
      for (let i = 0; i < fields.length; i += 1) out[fields[i]] = drawn[i];
    }
  }
}
