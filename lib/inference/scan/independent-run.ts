import { advance, essBulk, startReplica, type ReplicaState, type SamplerSettings } from '@/lib/sampler';
import { buildInference } from '../build-inference';
import { layOutParameters, massRange } from '../parameter-layout';
import type { Inference, InferenceSpec } from '../types';
import { edgesBetweenModes, type ModeScan, type ScanMode } from './modes';

/** Chains of a run: 15 degrees of freedom for the errors. */
export const CHAINS = 16;
/** Draws of a chain in which its walk is adapted; they are never counted. */
const WARMUP = 50;
/** Part of a chain that is left out as its way from the prior. */
const LEFT_OUT = 0.25;
/** A window of the density of a mass holds this part of its distinct draws: smaller modes stand with their neighbours. */
const WINDOW = 1 / 25;
/** And at least as many as are worth this many independent ones, lest noise divide it. */
const WINDOW_EFFECTIVE = 10;
/** A window that would hold more divides nothing. */
const WIDEST = 1 / 3;
/** Distinct draws of a mass below which it isn't divided. */
const LEAST_DISTINCT = 200;
/** By how much in ln a density made of draws must fall between two modes. */
const FALL = 1.4;
/** A box whose share is smaller is left out: the gate leaves differences of that size alone. */
const LEAST = 0.01;

/**
 * An independent cold run: what the mode table of three or more fields, and of light beside heavy ones, is compared with. Sixteen
 * chains at β = 1 with streams of their own, started over the prior, moved by the spectral jump and a random walk; no ladder, no
 * archive, nothing of the fit's replicas. A function of spec, seed and number of
 * draws alone.
 *
 * Modes: boxes between minima of each mass's marginal, whose density is taken from windows of the run's own distinct draws; they
 * become finer as the run grows. Share: mean over the chains; error: their scatter/√16,
 * and at least √(p(1 − p)/ESS) with p = (share × ESS + 1)/(ESS + 2) and ESS the smallest bulk size of a mass, so that a share of 0
 * or 1 has an error too.
 */
export class IndependentRun {
  private readonly settings: SamplerSettings;
  private readonly states: ReplicaState[] = [];
  /** Draws of each mass and chain. */
  private readonly draws: number[][][];

  private constructor(
    private readonly inference: Inference,
    private readonly seed: string,
    readonly names: readonly string[],
    private readonly positions: readonly number[],
    private readonly ranges: readonly (readonly [number, number])[],
  ) {
    this.settings = { warmup: WARMUP, blocks: [], walkEvery: 5 };
    this.draws = names.map(() => Array.from({ length: CHAINS }, () => []));
  }

  /** Null where a scan has the modes (one mass, two of one kind), where no mass is sampled, and where none is bounded or no jump made. */
  static of(
    spec: InferenceSpec,
    seed: string,
    build: () => Inference = () => buildInference(spec),
  ): IndependentRun | null {
    const layout = layOutParameters(spec);
    const sampled = layout.masses.flatMap((index, f) => (layout.position[index] >= 0 ? [f] : []));
    const mixed = layout.masses.length > 1 && !layout.massOrder.ascending;
    if (sampled.length === 0 || (layout.masses.length < 3 && !mixed)) return null;
    const ranges = sampled.map((f) => massRange(layout.massPriors[f]));
    if (ranges.some(([lo, hi]) => !Number.isFinite(hi - lo))) return null;
    const inference = build();
    if (inference.jumps.length === 0) return null;
    const indices = sampled.map((f) => layout.masses[f]);
    return new IndependentRun(
      inference,
      `${seed}/independent-run`,
      indices.map((index) => spec.template.parameters[index].name),
      indices.map((index) => layout.position[index]),
      ranges,
    );
  }

  /** The modes by the first `length` draws of each chain. */
  modesAt(length: number): ModeScan {
    this.extend(length);
    const from = leftOut(length);
    const masses = this.draws.map((chains) =>
      chains.map((chain) => Float64Array.from(chain.slice(from, length))),
    );
    const sizes = masses.map((chains) => {
      const size = essBulk(chains);
      return Number.isFinite(size) ? size : CHAINS;
    });
    const size = Math.min(...sizes);
    const edges = masses.map((chains, d) => divide(chains, this.ranges[d], sizes[d]));
    const modes = boxesOf(edges)
      .map(([lo, hi]) => shareOf(masses, lo, hi, size))
      .filter(({ weight }) => weight >= LEAST);
    return { by: 'run', names: this.names, modes, missed: null, effective: size };
  }

  private extend(length: number): void {
    const { target, jumps } = this.inference;
    for (let c = 0; c < CHAINS; c += 1) {
      const state = this.states[c] ?? startReplica(target, jumps, this.settings, this.seed, c);
      const missing = length - state.draws;
      if (missing <= 0) continue;
      const { state: next, block } = advance(target, jumps, this.settings, state, missing);
      this.states[c] = next;
      for (let k = 0; k < block.count; k += 1) {
        this.positions.forEach((position, d) =>
          this.draws[d][c].push(block.values[k * block.width + 2 + position]),
        );
      }
    }
  }
}

const leftOut = (length: number): number => Math.max(WARMUP, Math.ceil(LEFT_OUT * length));

/** Edges between the modes of a mass, from the density of its draws. */
function divide(
  chains: readonly Float64Array[],
  [lo, hi]: readonly [number, number],
  size: number,
): number[] {
  const distinct = Float64Array.from(new Set(chains.flatMap((chain) => [...chain]))).sort();
  const part = Math.max(WINDOW, WINDOW_EFFECTIVE / size);
  if (distinct.length < LEAST_DISTINCT || part > WIDEST) return [lo, hi];
  const window = Math.floor(distinct.length * part);
  const count = distinct.length - window;
  const middle = Float64Array.from({ length: count }, (_, i) => 0.5 * (distinct[i] + distinct[i + window]));
  const logDensity = Float64Array.from(
    { length: count },
    (_, i) => -Math.log(distinct[i + window] - distinct[i]),
  );
  return [lo, ...edgesBetweenModes(middle, logDensity, FALL).slice(1, -1), hi];
}

/** All boxes of a tensor grid of edges, as their lower and upper corners. */
function boxesOf(axes: readonly (readonly number[])[]): [number[], number[]][] {
  return axes.reduce<[number[], number[]][]>(
    (boxes, edges) =>
      boxes.flatMap(([lo, hi]) =>
        edges.slice(1).map((edge, i): [number[], number[]] => [
          [...lo, edges[i]],
          [...hi, edge],
        ]),
      ),
    [[[], []]],
  );
}

/** Share of the draws within a box, with its error and the mean masses there. */
function shareOf(
  masses: readonly (readonly Float64Array[])[],
  lo: number[],
  hi: number[],
  size: number,
): ScanMode {
  const sums = masses.map(() => 0);
  let within = 0;
  const shares = masses[0].map((first, c) => {
    let inside = 0;
    for (let k = 0; k < first.length; k += 1) {
      if (!masses.every((chains, d) => chains[c][k] >= lo[d] && chains[c][k] < hi[d])) continue;
      inside += 1;
      masses.forEach((chains, d) => (sums[d] += chains[c][k]));
    }
    within += inside;
    return inside / first.length;
  });
  const weight = shares.reduce((sum, share) => sum + share, 0) / CHAINS;
  const scatter = shares.reduce((sum, share) => sum + (share - weight) ** 2, 0) / (CHAINS - 1);
  const p = (weight * size + 1) / (size + 2);
  const error = Math.max(Math.sqrt(scatter / CHAINS), Math.sqrt((p * (1 - p)) / size));
  return { lo, hi, mu: sums.map((sum) => sum / within), weight, error };
}
