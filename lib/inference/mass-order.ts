import type { FieldKind } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import { drawOrderedMasses, logOrderProbability, type MassPrior } from './ordered-masses';

/** Fields of one kind: which of all fields, in the order in which their parameters ascend. */
interface Group {
  fields: readonly number[];
  priors: readonly MassPrior[];
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
    const group = (kind: FieldKind): Group => {
      const fields = kinds.flatMap((own, f) => (own === kind ? [f] : []));
      if (kind === 'light') fields.reverse();
      return { fields, priors: fields.map((f) => priors[f]), drawn: new Float64Array(fields.length) };
    };
    this.groups = [group('light'), group('heavy')].filter(({ fields }) => fields.length > 0);
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
    for (const { fields, priors, drawn } of this.groups) {
      drawOrderedMasses(priors, rng, drawn);
      for (let i = 0; i < fields.length; i += 1) out[fields[i]] = drawn[i];
    }
  }
}
