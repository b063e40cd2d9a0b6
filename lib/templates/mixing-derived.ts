import { mixingWeights } from './mixing';
import { squaredMass } from './parameters';
import type { DerivedDeclaration, FieldKind } from './types';

function matrixElement(
  row: number,
  column: number,
  evaluate: (x: ArrayLike<number>) => number,
): DerivedDeclaration {
  const sub = `${row}${column}`;
  return {
    name: `M2_${sub}`,
    tex: `(M^2)_{${sub}}`,
    symbol: { base: 'M²', sub },
    label: `mass matrix element ${sub}`,
    unit: 'H²',
    field: null,
    evaluate,
  };
}

/**
 * What the mixing angles and masses of N fields determine, for a parameter vector with the mass parameters at `masses` and
 * the N − 1 angles from `angles` on; nothing for one field. `kinds` says which are light; all heavy where it is left out.
 *
 * - weights w1 … wN = O_{1i}²;
 * - elements of the squared mass matrix M² = O diag(m²) Oᵀ in the flavour basis, where F₁ is what couples, in H²:
 *   M2_11 = Σ w_i m_i² for any N; for N = 2 with F₁ = cos θ σ₁ + sin θ σ₂ also M2_22 = m₁² sin²θ + m₂² cos²θ and
 *   M2_12 = (m₂² − m₁²) sin θ cos θ. For N ≥ 3 the others hang on angles that single exchange doesn't see.
 */
export function mixingDerived(
  masses: readonly number[],
  angles: number,
  kinds?: readonly FieldKind[],
): DerivedDeclaration[] {
  const n = masses.length;
  if (n === 1) return [];
  const square = (x: ArrayLike<number>, i: number): number =>
    squaredMass(kinds?.[i] ?? 'heavy', x[masses[i]]);
  const angleValues = new Float64Array(n - 1);
  const weightValues = new Float64Array(n);
  const weights = (x: ArrayLike<number>): Float64Array => {
    for (let k = 0; k < n - 1; k += 1) angleValues[k] = x[angles + k];
    return mixingWeights(angleValues, weightValues);
  };
  const derived: DerivedDeclaration[] = masses.map((_, i) => ({
    name: `w${i + 1}`,
    tex: `w_{${i + 1}}`,
    symbol: { base: 'w', sub: String(i + 1) },
    label: `weight ${i + 1}`,
    unit: '',
    field: i,
    evaluate: (x) => weights(x)[i],
  }));
  derived.push(
    matrixElement(1, 1, (x) => {
      const w = weights(x);
      return masses.reduce((sum, _, i) => sum + w[i] * square(x, i), 0);
    }),
  );
  if (n === 2) {
    derived.push(
      matrixElement(2, 2, (x) => {
        const w = weights(x);
        return w[1] * square(x, 0) + w[0] * square(x, 1);
      }),
      matrixElement(1, 2, (x) => {
        const difference = square(x, 1) - square(x, 0);
        return difference * Math.sin(x[angles]) * Math.cos(x[angles]);
      }),
    );
  }
  return derived;
}

/** TeX of the weight of field `field` as a factor: nothing for one field. */
export function weightTex(fields: number, field: number): string {
  return fields === 1 ? '' : `w_{${field + 1}}\\,`;
}

const WEIGHT_DEFINITIONS: Readonly<Record<number, readonly string[]>> = {
  1: [],
  2: ['w_1 = \\cos^2\\theta,\\quad w_2 = \\sin^2\\theta'],
  3: [
    'w_1 = \\cos^2\\theta_{12}\\cos^2\\theta_{13}',
    'w_2 = \\sin^2\\theta_{12}\\cos^2\\theta_{13}',
    'w_3 = \\sin^2\\theta_{13}',
  ],
  4: [
    'w_1 = \\cos^2\\vartheta_1',
    'w_2 = \\sin^2\\vartheta_1\\cos^2\\vartheta_2',
    'w_3 = \\sin^2\\vartheta_1\\sin^2\\vartheta_2\\cos^2\\vartheta_3',
    'w_4 = \\sin^2\\vartheta_1\\sin^2\\vartheta_2\\sin^2\\vartheta_3',
  ],
};

/** TeX of the weights in terms of the angles, one equation a line. */
export function mixingDefinition(fields: number): readonly string[] {
  return WEIGHT_DEFINITIONS[fields] ?? [];
}
