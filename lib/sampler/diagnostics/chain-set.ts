/**
 * Preparation that the diagnostics share: splitting, sorting, rank normalisation, quantiles.
 * Source: Vehtari, Gelman, Simpson, Carpenter, Bürkner (2021), Bayesian Analysis 16, 667.
 */
import { ascendingOrder, normalScores, orderOfDistances, rankScores } from './ranks';

/**
 * The quantile of type 7 (linear interpolation at (n − 1) p) of values sorted upwards; p in [0, 1]; NaN if empty.
 * Hyndman and Fan (1996), The American Statistician 50, 361.
 */
export function sortedQuantile(sorted: Float64Array, p: number): number {
  const n = sorted.length;
  if (n === 0 || !(p >= 0 && p <= 1)) return NaN;
  const place = (n - 1) * p;
  const low = Math.floor(place);
  const below = sorted[low];
  if (low + 1 >= n || sorted[low + 1] === below) return below;
  const share = place - low;
  return (1 - share) * below + share * sorted[low + 1];
}

/** All draws of all chains in one array, chain after chain. */
export function poolDraws(chains: readonly Float64Array[]): Float64Array {
  const all = new Float64Array(chains.reduce((sum, chain) => sum + chain.length, 0));
  let at = 0;
  for (const chain of chains) {
    all.set(chain, at);
    at += chain.length;
  }
  return all;
}

/** First floor(N/2) and last floor(N/2) draws of each chain, as views: the middle draw of an odd chain is left out. */
function splitChains(chains: readonly Float64Array[]): Float64Array[] {
  const half = Math.floor((chains[0]?.length ?? 0) / 2);
  return chains.flatMap((chain) => [chain.subarray(0, half), chain.subarray(chain.length - half)]);
}

/** The values at the given places, in a plain loop: a callback for each draw would cost more than the sorting. */
function pick(values: Float64Array, places: Uint32Array): Float64Array {
  const result = new Float64Array(places.length);
  for (let i = 0; i < result.length; i++) result[i] = values[places[i]];
  return result;
}

/** Draws that are NaN or infinite: how many there are, and the chain and draw (from 0) of the first. */
export interface NonFinite {
  count: number;
  chain: number;
  draw: number;
}

function findNonFinite(chains: readonly Float64Array[]): NonFinite | null {
  let found: NonFinite | null = null;
  for (let chain = 0; chain < chains.length; chain++) {
    const values = chains[chain];
    for (let draw = 0; draw < values.length; draw++) {
      if (Number.isFinite(values[draw])) continue;
      found ??= { count: 0, chain, draw };
      found.count++;
    }
  }
  return found;
}

/** Chains made ready for the diagnostics; what is costly is computed once, when first asked for. */
export class ChainSet {
  readonly nonFinite: NonFinite | null;
  /** Draws of the split chains, one chain after the other. */
  private readonly pooled: Float64Array;
  private readonly half: number;
  private known: {
    order?: Uint32Array;
    sortedSplit?: Float64Array;
    sorted?: Float64Array;
    scores?: Float64Array;
  } = {};

  /** Throws a RangeError where the chains differ in length: a diagnostic of those has no definition. */
  constructor(private readonly chains: readonly Float64Array[]) {
    const length = chains.length > 0 ? chains[0].length : 0;
    if (chains.some((chain) => chain.length !== length)) {
      const lengths = chains.map((chain) => chain.length).join(', ');
      throw new RangeError(`The chains have ${lengths} draws; cut them to one length before a diagnostic.`);
    }
    this.nonFinite = findNonFinite(chains);
    this.half = Math.floor(length / 2);
    this.pooled = poolDraws(splitChains(chains));
  }

  /** True where no diagnostic has a value: no draws, a draw that isn't finite, or all draws equal. */
  get empty(): boolean {
    return this.nonFinite !== null || this.sorted.length === 0 || this.constant;
  }

  /** Every draw of every chain is one and the same number. */
  get constant(): boolean {
    const sorted = this.sorted;
    return sorted.length > 0 && sorted[0] === sorted[sorted.length - 1];
  }

  /** All draws, the middle ones of odd chains included, sorted upwards. */
  get sorted(): Float64Array {
    const whole = this.chains.length === 0 || this.chains[0].length === 2 * this.half;
    const usual = whole && this.nonFinite === null;
    this.known.sorted ??= usual ? this.sortedSplit : poolDraws(this.chains).sort();
    return this.known.sorted;
  }

  /** The split chains. */
  get split(): Float64Array[] {
    return this.cut(this.pooled);
  }

  /** The rank-normalised split chains. */
  rankNormalised(): Float64Array[] {
    return this.cut(rankScores(this.pooled, this.order, this.scores));
  }

  /** The split chains' distances from a centre. */
  distances(centre: number): Float64Array[] {
    return this.cut(this.distancesFrom(centre));
  }

  /** The split chains' squared distances from a centre. */
  squaredDistances(centre: number): Float64Array[] {
    const squares = this.distancesFrom(centre);
    for (let i = 0; i < squares.length; i++) squares[i] *= squares[i];
    return this.cut(squares);
  }

  /** The rank-normalised distances, or null where all draws are equally far from the centre. */
  rankNormalisedDistances(centre: number): Float64Array[] | null {
    const distances = this.distancesFrom(centre);
    const order = orderOfDistances(distances, this.sortedSplit, this.order, centre);
    if (distances[order[0]] === distances[order[order.length - 1]]) return null;
    return this.cut(rankScores(distances, order, this.scores));
  }

  /** The split chains' indicators of x ≤ bound. */
  indicators(bound: number): Float64Array[] {
    const result = new Float64Array(this.pooled.length);
    for (let i = 0; i < result.length; i++) result[i] = this.pooled[i] <= bound ? 1 : 0;
    return this.cut(result);
  }

  private distancesFrom(centre: number): Float64Array {
    const result = new Float64Array(this.pooled.length);
    for (let i = 0; i < result.length; i++) result[i] = Math.abs(this.pooled[i] - centre);
    return result;
  }

  private cut(pooled: Float64Array): Float64Array[] {
    return Array.from({ length: 2 * this.chains.length }, (_, i) =>
      pooled.subarray(i * this.half, (i + 1) * this.half),
    );
  }

  private get order(): Uint32Array {
    this.known.order ??= ascendingOrder(this.pooled);
    return this.known.order;
  }

  private get sortedSplit(): Float64Array {
    this.known.sortedSplit ??= pick(this.pooled, this.order);
    return this.known.sortedSplit;
  }

  private get scores(): Float64Array {
    this.known.scores ??= normalScores(this.pooled.length);
    return this.known.scores;
  }
}
