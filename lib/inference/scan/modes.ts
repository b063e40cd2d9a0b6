import { createRng } from '@/lib/sampler';
import { buildInference } from '../build-inference';
import { layOutParameters, massRange } from '../parameter-layout';
import { lnPriorDensity } from '../priors';
import type { Inference, InferenceSpec } from '../types';
import { scanGrid } from './line-scan';
import { planeGrid, scanPlane } from './plane-scan';
import { logSumExp } from './quadrature-nodes';
import { buildCollapsedModel } from './scan-model';

/** A box of masses between minima of the collapsed density, with its share of the posterior as the scan has it. */
export interface ScanMode {
  lo: number[];
  hi: number[];
  /** Mean masses within it. */
  mu: number[];
  /** Share of the posterior for the fit's own prior; of a scan NaN where its error is too large to say. */
  weight: number;
  error: number;
}

export interface ModeScan {
  /** Where the shares come from: a scan's draws of the jump's proposal, or an independent cold run. */
  by: 'scan' | 'run';
  /** Names of the masses, in the order of every mode's. */
  names: readonly string[];
  modes: ScanMode[];
  /** Masses of a far better fit that the proposal doesn't reach, with the ln by which it is better; null without one. */
  missed: { mu: number[]; by: number } | null;
  /** Draws that the independent run is worth, by the mass that it knows least of; left out for a scan. */
  effective?: number;
}

/** Draws behind the weights. */
const DRAWS = 12_000;
/** A weight whose error is larger has no value. */
export const MOST_ERROR = 0.02;
/** A box whose share is smaller is left out. */
const LEAST = 0.002;
/** A minimum divides two modes if the density falls there by this much, in ln, below the lower of them. */
const FALL = 0.7;
/** By how much in ln a place of the scan must be better than all that the proposal drew to count as missed. */
const MISSED = 15;

/** How fast columns turn with the mass at most, for the grids: a generous bound on |ln κ| of any axis. */
function reachOf(spec: InferenceSpec): number {
  const layout = layOutParameters(spec);
  const [lo, hi] = massRange(layout.massPriors[0]);
  const middle = Number.isFinite(lo + hi) ? 0.5 * (lo + hi) : 1;
  const block = spec.template.blocks[0];
  const [here, there] = [0, 1].map(() =>
    Array.from({ length: block.width }, () => new Float64Array(spec.data.S.length)),
  );
  block.fill(middle, here);
  block.fill(middle + 1e-4, there);
  let rate = 4;
  for (let i = 0; i < spec.data.S.length; i += 1) {
    const size = Math.hypot(...here.map((column) => column[i]));
    const moved = Math.hypot(...here.map((column, c) => there[c][i] - column[i]));
    if (size > 0) rate = Math.max(rate, Math.min(20, moved / size / 1e-4));
  }
  return rate;
}

/** Edges between modes of a density in ln on a grid: its ends, and minima that are deeper than `fall`. */
export function edgesBetweenModes(
  x: ArrayLike<number>,
  logDensity: ArrayLike<number>,
  fall: number = FALL,
): number[] {
  const edges: number[] = [x[0]];
  let peak = logDensity[0];
  let lowest = 0;
  for (let i = 1; i < x.length; i += 1) {
    if (logDensity[i] < logDensity[lowest]) lowest = i;
    const fallen = Math.min(peak, logDensity[i]) - logDensity[lowest];
    if (fallen > fall) {
      edges.push(x[lowest]);
      peak = logDensity[i];
      lowest = i;
    } else if (logDensity[i] > peak) {
      peak = logDensity[i];
      lowest = i;
    }
  }
  edges.push(x[x.length - 1]);
  return edges;
}

/**
 * The modes of a posterior of one or two masses as the scan has them, for comparison with chains; null where there are none to
 * compare or more than two masses. Deterministic for a seed.
 *
 * Edges: one mass: minima of ln p(d | μ) + ln prior. Two: minima of each mass's marginal of exp(Δχ²/2) on the plane. Weights: masses
 * from the jump's proposal, everything else from its conditional, each draw weighted by posterior/proposal: the collapsed
 * evidence times the mean of prior/reference prior over the conditional. The error of a share is that of the weighted mean.
 */
export function scanModes(
  spec: InferenceSpec,
  seed: string,
  inference: Inference = buildInference(spec),
): ModeScan | null {
  const layout = layOutParameters(spec);
  const sampled = layout.masses.flatMap((index, f) => (layout.position[index] >= 0 ? [f] : []));
  if (layout.masses.length < 1 || layout.masses.length > 2 || sampled.length !== layout.masses.length)
    return null;
  // The plane is one grid of μ for both fields: masses of different kinds have no such plane.
  if (layout.masses.length === 2 && !layout.massOrder.ascending) return null;
  const ranges = layout.massPriors.map((prior) => massRange(prior));
  if (ranges.some(([lo, hi]) => !Number.isFinite(hi - lo))) return null;
  const [jump] = inference.jumps;
  if (!jump?.normalised) return null;
  const lo = Math.max(1e-3, Math.min(...ranges.map(([from]) => from)));
  const hi = Math.max(...ranges.map(([, to]) => to));
  const model = buildCollapsedModel(spec, (kind) => kind);
  const reach = reachOf(spec);
  const lnPrior = (at: ArrayLike<number>): number =>
    layout.massPriors.reduce(
      (sum, prior, f) => (prior.kind === 'fixed' ? sum : sum + lnPriorDensity(prior, at[f])),
      0,
    );

  let axes: number[][];
  let best: number[];
  if (layout.masses.length === 1) {
    const grid = scanGrid(lo, hi, reach);
    const background = model.background().logLikelihood;
    const density = Array.from(grid, (mu) => {
      const columns = [model.columns(0, mu)];
      const sharpness = Math.sqrt(Math.max(0, 2 * (model.fit([mu], columns).logLikelihood - background)));
      return (model.logEvidence([mu], sharpness, columns) ?? NaN) + lnPrior([mu]);
    });
    axes = [edgesBetweenModes(grid, density)];
    best = [grid[density.indexOf(Math.max(...density))]];
  } else {
    const plane = scanPlane(model, planeGrid(lo, hi, reach), { evidence: false });
    const n = plane.mu.length;
    axes = [0, 1].map((axis) => {
      const marginal = Array.from(plane.mu, (_, k) =>
        logSumExp(
          Array.from({ length: n }, (_unused, other) => {
            const value = axis === 0 ? plane.deltaChi2[k * n + other] : plane.deltaChi2[other * n + k];
            return Number.isNaN(value) ? -Infinity : value / 2;
          }),
        ),
      );
      const known = Array.from(plane.mu).flatMap((mu, k) =>
        Number.isFinite(marginal[k]) ? [[mu, marginal[k]]] : [],
      );
      const edges = edgesBetweenModes(
        known.map(([mu]) => mu),
        known.map(([, value]) => value),
      );
      edges[0] = lo;
      edges[edges.length - 1] = hi;
      return edges;
    });
    best = plane.best.mu;
  }

  const positions = layout.masses.map((index) => layout.position[index]);
  const { target } = inference;
  const rng = createRng(`${seed}/modes`);
  const from = new Float64Array(layout.free.length);
  target.drawPrior(rng, from);
  const x = new Float64Array(layout.free.length);
  const logs = new Float64Array(DRAWS);
  const boxes = new Int32Array(DRAWS);
  const masses = positions.map(() => new Float64Array(DRAWS));
  const cells = axes.reduce((product, edges) => product * (edges.length - 1), 1);
  for (let k = 0; k < DRAWS; k += 1) {
    jump.draw(rng, from, x);
    const prior = target.logPrior(x);
    logs[k] = prior > -Infinity ? prior + target.logLikelihood(x) - jump.logDensity(x, from) : -Infinity;
    let box = 0;
    positions.forEach((position, d) => {
      masses[d][k] = x[position];
      box = box * (axes[d].length - 1) + intervalOf(axes[d], x[position]);
    });
    boxes[k] = box;
  }
  const total = logSumExp(logs);
  const weights = logs.map((log) => Math.exp(log - total));
  const top = logs.reduce((first, log, k) => (log > logs[first] ? k : first), 0);

  const modes: ScanMode[] = [];
  for (let cell = 0; cell < cells; cell += 1) {
    let weight = 0;
    const sums = masses.map(() => 0);
    for (let k = 0; k < DRAWS; k += 1) {
      if (boxes[k] !== cell) continue;
      weight += weights[k];
      masses.forEach((values, d) => (sums[d] += weights[k] * values[k]));
    }
    if (weight < LEAST) continue;
    let square = 0;
    for (let k = 0; k < DRAWS; k += 1) square += (weights[k] * ((boxes[k] === cell ? 1 : 0) - weight)) ** 2;
    const error = Math.sqrt(square);
    let rest = cell;
    const place = axes.map(() => 0);
    for (let d = axes.length - 1; d >= 0; d -= 1) {
      place[d] = rest % (axes[d].length - 1);
      rest = Math.floor(rest / (axes[d].length - 1));
    }
    modes.push({
      lo: axes.map((edges, d) => edges[place[d]]),
      hi: axes.map((edges, d) => edges[place[d] + 1]),
      mu: sums.map((sum) => sum / weight),
      weight: error <= MOST_ERROR ? weight : NaN,
      error,
    });
  }
  const reached = masses.map((values) => values[top]);
  const collapsed = (at: number[]): number | null => {
    const value = model.logEvidence(at, 6);
    return value === null ? null : value + lnPrior(at);
  };
  const [there, here] = [collapsed(best), collapsed(reached)];
  const by = there === null || here === null ? NaN : there - here;
  return {
    by: 'scan',
    names: layout.masses.map((index) => spec.template.parameters[index].name),
    modes: modes.sort((a, b) => a.lo[0] - b.lo[0]),
    missed: by > MISSED ? { mu: best, by } : null,
  };
}

function intervalOf(edges: readonly number[], x: number): number {
  let i = 0;
  while (i < edges.length - 2 && x >= edges[i + 1]) i += 1;
  return i;
}
