import { addShapes, hardPermutation, lightSquare, heavySquare, softPermutation } from './exact-shape';
import { TemplateError } from './errors';
import { ExchangeFunction, regularStencil } from './exchange-function';
import { addLeadingLight } from './light-coefficients';
import { gaussLegendre } from './gauss-legendre';
import type { Axis } from './types';

/**
 * Columns of one field of the exact or the leading light shape on an axis: vertex 1 and vertex 2 at unit couplings, averaged
 * over each bin. As functions of the mass they are read from Chebyshev panels that are laid when a mass first falls into
 * them, so that a mass costs microseconds.
 */

/** The shape of both vertices at one z, added with a weight at every place: out[v][place] += weight Ŝ_v(z, κ_place). */
type Kernel = (z: number, weight: number, kappa: Float64Array, out: readonly Float64Array[]) => void;

/** Every permutation, every order in κ. */
const exactKernel: Kernel = (z, weight, kappa, out) => {
  const exchange = new ExchangeFunction(z);
  const h = new Float64Array(3);
  const shapes = new Float64Array(2);
  for (let i = 0; i < kappa.length; i += 1) {
    shapes.fill(0);
    addShapes(exchange, softPermutation(kappa[i]), 1, h, shapes);
    addShapes(exchange, hardPermutation(kappa[i]), 2, h, shapes);
    out[0][i] += weight * shapes[0];
    out[1][i] += weight * shapes[1];
  }
};

/** Places at which the shape is wanted, and how they make up the bins: `perBin[i]` places follow one another. */
interface Places {
  kappa: Float64Array;
  weight: Float64Array;
  first: Int32Array;
}

/**
 * Gauss–Legendre places in every bin of an axis: 8 and 14 more a unit of ln κ, so that bins up to μ D = 20 D are exact to
 * 1e-12. Points are places of their own.
 */
function placesOf(axis: Axis): Places {
  if (axis.kind === 'points') {
    const n = axis.kappa.length;
    return {
      kappa: Float64Array.from(axis.kappa),
      weight: new Float64Array(n).fill(1),
      first: Int32Array.from({ length: n + 1 }, (_, i) => i),
    };
  }
  const kappa: number[] = [];
  const weight: number[] = [];
  const first = new Int32Array(axis.lo.length + 1);
  axis.lo.forEach((lo, i) => {
    const width = Math.log1p((axis.hi[i] - lo) / lo);
    const { nodes, weights } = gaussLegendre(8 + Math.ceil(14 * width));
    // The weight κ^q relative to the bin's middle, so that no bin is too far out for it.
    const shares = weights.map((w, k) => w * Math.exp(axis.weightPower * 0.5 * width * nodes[k]));
    const total = shares.reduce((sum, share) => sum + share, 0);
    nodes.forEach((node, k) => {
      kappa.push(lo * Math.exp(0.5 * width * (1 + node)));
      weight.push(shares[k] / total);
    });
    first[i + 1] = kappa.length;
  });
  return { kappa: Float64Array.from(kappa), weight: Float64Array.from(weight), first };
}

/** The shapes of both vertices at every place. */
function writeShapes(z: number, kernel: Kernel, places: Places, at: readonly Float64Array[]): void {
  const stencil = regularStencil(z);
  for (const column of at) column.fill(0);
  stencil.z.forEach((node, s) => kernel(node, stencil.weight[s], places.kappa, at));
}

/** The mean over the places of each bin. */
function writeMeans(places: Places, at: Float64Array, out: Float64Array): void {
  for (let i = 0; i + 1 < places.first.length; i += 1) {
    let mean = 0;
    for (let j = places.first[i]; j < places.first[i + 1]; j += 1) mean += places.weight[j] * at[j];
    out[i] = mean;
  }
}

/** How the mass parameter of a kind of field maps to z, and how its range is cut into panels. */
interface MassScale {
  square(mass: number): number;
  /** Lower and upper end of the panel that holds the parameter. */
  panel(mass: number): readonly [number, number];
  /** A factor that takes the pole at the end of the range out of the columns. */
  tame(mass: number): number;
}

const heavyScale: MassScale = {
  square: heavySquare,
  panel: (mu) => [Math.floor(mu), Math.floor(mu) + 1],
  tame: () => 1,
};

/** Panels of ν: on each of them the leading terms, which change between 3/4 and 9/10, are analytic too. */
const LIGHT_EDGES = [0, 0.375, 0.75, 0.9, 1.2, 1.5] as const;
const lightScale: MassScale = {
  square: lightSquare,
  panel(nu) {
    const upper = LIGHT_EDGES.findIndex((edge) => edge > nu);
    return [LIGHT_EDGES[upper - 1], LIGHT_EDGES[upper]];
  },
  tame: (nu) => 1.5 - nu,
};

/** Chebyshev nodes a panel: J_28 of half a panel times |ln κ| ≤ 7 is below 1e-13. */
const NODES = 28;
const CHEBYSHEV = Float64Array.from({ length: NODES }, (_, k) => Math.cos((Math.PI * (k + 0.5)) / NODES));
const BARYCENTRIC = CHEBYSHEV.map((_, k) => (k % 2 === 0 ? 1 : -1) * Math.sin((Math.PI * (k + 0.5)) / NODES));

/** One kind of field on one axis; all fields of that kind share it. */
export interface ExchangeColumns {
  readonly length: number;
  /** Writes ⟨Ŝ₁⟩ into out[0] and ⟨Ŝ₂⟩ into out[1] at the mass parameter; within 1e-10 of the column's size. */
  fill(mass: number, out: Float64Array[]): void;
}

function exchangeColumns(axis: Axis, kernel: Kernel, scale: MassScale): ExchangeColumns {
  const places = placesOf(axis);
  const length = places.first.length - 1;
  const panels = new Map<number, Float64Array>();

  const at = [new Float64Array(places.kappa.length), new Float64Array(places.kappa.length)];
  /** Node by node the columns of both vertices, one after the other. */
  const layPanel = (lo: number, hi: number): Float64Array => {
    const table = new Float64Array(NODES * 2 * length);
    for (let k = 0; k < NODES; k += 1) {
      const mass = lo + 0.5 * (hi - lo) * (1 + CHEBYSHEV[k]);
      writeShapes(scale.square(mass), kernel, places, at);
      const tame = scale.tame(mass);
      for (let v = 0; v < 2; v += 1) {
        const column = table.subarray((2 * k + v) * length, (2 * k + v + 1) * length);
        writeMeans(places, at[v], column);
        for (let i = 0; i < length; i += 1) column[i] *= tame;
      }
    }
    return table;
  };

  const weights = new Float64Array(NODES);
  return {
    length,
    fill(mass, out) {
      scale.square(mass);
      const [lo, hi] = scale.panel(mass);
      let table = panels.get(lo);
      if (table === undefined) {
        table = layPanel(lo, hi);
        panels.set(lo, table);
      }
      const x = (2 * (mass - lo)) / (hi - lo) - 1;
      let total = 0;
      let hit = -1;
      for (let k = 0; k < NODES; k += 1) {
        const distance = x - CHEBYSHEV[k];
        if (distance === 0) hit = k;
        weights[k] = BARYCENTRIC[k] / distance;
        total += weights[k];
      }
      if (hit >= 0) {
        weights.fill(0);
        weights[hit] = 1;
        total = 1;
      }
      const norm = total * scale.tame(mass);
      for (let v = 0; v < 2; v += 1) {
        const column = out[v];
        column.fill(0);
        for (let k = 0; k < NODES; k += 1) {
          const weight = weights[k] / norm;
          const offset = (2 * k + v) * length;
          for (let i = 0; i < length; i += 1) column[i] += weight * table[offset + i];
        }
      }
    },
  };
}

/** Refuses places that belong to no isosceles triangle: TemplateError `invalid_axis` naming the first. */
function requireTriangles(axis: Axis): void {
  const [name, values] = axis.kind === 'points' ? ['axis.kappa', axis.kappa] : ['axis.hi', axis.hi];
  const bad = values.findIndex((kappa) => kappa >= 2);
  if (bad < 0) return;
  throw new TemplateError(
    'invalid_axis',
    `${name}[${bad}]`,
    `kappa = ${values[bad]} belongs to no isosceles triangle, which needs kappa < 2; cut it off with kappaMax`,
  );
}

/** The exact total over three permutations of a heavy field, 0 ≤ μ ≤ 20. */
export function exactHeavyColumns(axis: Axis): ExchangeColumns {
  requireTriangles(axis);
  return exchangeColumns(axis, exactKernel, heavyScale);
}

/** The exact total over three permutations of a light field, 0 ≤ ν < 3/2. */
export function exactLightColumns(axis: Axis): ExchangeColumns {
  requireTriangles(axis);
  return exchangeColumns(axis, exactKernel, lightScale);
}

/** The leading terms of a light field (light-coefficients.ts), 0 ≤ ν < 3/2. */
export function leadingLightColumns(axis: Axis): ExchangeColumns {
  return exchangeColumns(axis, addLeadingLight, lightScale);
}
