import type { ExchangeColumns } from './exchange-columns';
import { averageDefinition, backgroundTerms, binMean, fieldClass, sumFormula } from './formula';
import type { TemplateFormula } from './formula';
import { mixingDefinition, mixingDerived, weightTex } from './mixing-derived';
import { mixingWeights } from './mixing';
import {
  angleParameters,
  backgroundParameters,
  couplingParameter,
  couplingRatio,
  lightMassParameter,
  massInHubbleUnits,
  massParameter,
  vertexAngleParameter,
} from './parameters';
import type { Axis, DerivedDeclaration, FieldKind, ParameterDeclaration, Vertex } from './types';

/**
 * What templates of mixed fields with the vertices' shapes as columns have in common: S = g Σ_i w_i ⟨Ŝ(m_i)⟩, masses first (ν
 * of the light fields, then μ of the heavy ones), then angles, g, α of a mixture and the background.
 */

/** Heaviest field whose exact shape is computed: beyond, nothing of it is seen. */
const HEAVIEST = 20;

/** The kinds of the fields: all heavy for a number. */
export function fieldKinds(fields: number | readonly FieldKind[]): FieldKind[] {
  return typeof fields === 'number' ? new Array<FieldKind>(fields).fill('heavy') : [...fields];
}

export function exchangeParameters(
  kinds: readonly FieldKind[],
  vertex: Vertex | 'mixture',
  background: readonly number[],
): ParameterDeclaration[] {
  const light = kinds.filter((kind) => kind === 'light').length;
  return [
    ...kinds.map((kind, i): ParameterDeclaration => {
      if (kind === 'light') return lightMassParameter(i, i + 1);
      return { ...massParameter(i, i - light + 1), range: [0, HEAVIEST] };
    }),
    ...angleParameters(kinds.length),
    couplingParameter(),
    ...(vertex === 'mixture' ? [vertexAngleParameter()] : []),
    ...backgroundParameters(background),
  ];
}

export function exchangeDerived(kinds: readonly FieldKind[]): DerivedDeclaration[] {
  const n = kinds.length;
  return [
    ...kinds.map((kind, i) => massInHubbleUnits(i, i, kind)),
    ...mixingDerived(
      kinds.map((_, i) => i),
      n,
      kinds,
    ),
    couplingRatio(2 * n - 1),
  ];
}

/** Coefficients g w_i (1, 0), g w_i (0, 1) or g w_i (cos α, sin α) of the columns of vertex 1 and 2. */
export function exchangeCoefficients(
  fields: number,
  vertex: Vertex | 'mixture',
): (x: ArrayLike<number>, out: Float64Array) => void {
  const angles = new Float64Array(fields - 1);
  const weights = new Float64Array(fields);
  const coupling = 2 * fields - 1;
  return (x, out) => {
    for (let k = 0; k < angles.length; k += 1) angles[k] = x[fields + k];
    mixingWeights(angles, weights);
    const alpha = vertex === 'mixture' ? x[coupling + 1] : 0;
    const first = vertex === 'mixture' ? Math.cos(alpha) : vertex === 1 ? 1 : 0;
    const second = vertex === 'mixture' ? Math.sin(alpha) : vertex === 1 ? 0 : 1;
    for (let i = 0; i < fields; i += 1) {
      const strength = x[coupling] * weights[i];
      out[2 * i] = strength * first;
      out[2 * i + 1] = strength * second;
    }
  };
}

/** One set of columns a kind, shared by its fields. */
export function exchangeFills(
  kinds: readonly FieldKind[],
  axis: Axis,
  columns: Partial<Record<FieldKind, (axis: Axis) => ExchangeColumns>>,
): ((mass: number, out: Float64Array[]) => void)[] {
  const made = new Map<FieldKind, ExchangeColumns>();
  return kinds.map((kind) => {
    const known = made.get(kind) ?? columns[kind]?.(axis);
    if (known === undefined) throw new Error(`no columns for a ${kind} field`);
    made.set(kind, known);
    return known.fill;
  });
}

/** TeX of a field's mass parameter: ν of the light ones, which come first, else μ. */
function massTex(kinds: readonly FieldKind[], field: number): string {
  const light = kinds.filter((kind) => kind === 'light').length;
  return kinds[field] === 'light' ? `\\nu_{${field + 1}}` : `\\mu_{${field - light + 1}}`;
}

interface ExchangeFormula {
  kinds: readonly FieldKind[];
  options: {
    vertex: Vertex | 'mixture';
    background: readonly number[];
    binAverage?: boolean;
    binWeight: number;
  };
  /** Written behind Ŝ of a field: "^{tot}". */
  mark: string;
  /** What Ŝ stands for, at the vertices that are there. */
  shapes(vertices: { first: boolean; second: boolean }): readonly string[];
}

/** g Σ_i w_i ⟨Ŝ(m_i, κ)⟩ + background, typeset, with what its symbols stand for. */
export function exchangeFormula({ kinds, options, mark, shapes }: ExchangeFormula): TemplateFormula {
  const { vertex, background, binWeight } = options;
  const averaged = options.binAverage !== false;
  const mixed = vertex === 'mixture';
  const shape = `${mixed ? '\\hat S' : `\\hat S_${vertex}`}${mark}`;
  const terms = kinds.map((_, i) =>
    fieldClass(
      i,
      `g\\,${weightTex(kinds.length, i)}${binMean(`${shape}(${massTex(kinds, i)}, \\kappa)`, averaged)}`,
    ),
  );
  return sumFormula(terms, backgroundTerms(background, averaged), [
    ...mixingDefinition(kinds.length),
    ...(mixed ? ['\\hat S = \\cos\\alpha\\;\\hat S_1 + \\sin\\alpha\\;\\hat S_2'] : []),
    ...shapes({ first: vertex !== 2, second: vertex !== 1 }),
    ...averageDefinition(averaged, binWeight),
  ]);
}
