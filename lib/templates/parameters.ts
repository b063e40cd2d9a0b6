import type { DerivedDeclaration, FieldKind, ParameterDeclaration } from './types';

/** Largest ν: at 3/2, the massless field, the shape diverges. */
const LIGHTEST = 1.49;

/** Declarations of the parameters that several templates share, with their default priors. */

const SUPERSCRIPTS: Readonly<Record<string, string>> = { '-1': '⁻¹', '2': '²', '3': '³', '4': '⁴' };

/** μ of field `field` (counted from 0), the `number`th heavy one: frequency in ln κ, √(m²/H² − 9/4). */
export function massParameter(field: number, number = field + 1): ParameterDeclaration {
  const n = String(number);
  return {
    name: `mu${n}`,
    tex: `\\mu_{${n}}`,
    symbol: { base: 'μ', sub: n },
    label: `mass ${n}`,
    unit: '',
    role: 'mass',
    field,
    range: [0, 100],
    circular: false,
    defaultPrior: { kind: 'uniform', lo: 0.2, hi: 8 },
  };
}

/** ν of field `field` (counted from 0), the `number`th light one: √(9/4 − m²/H²), between 0 (m = 3H/2) and 3/2 (massless). */
export function lightMassParameter(field: number, number: number): ParameterDeclaration {
  const n = String(number);
  return {
    name: `nu${n}`,
    tex: `\\nu_{${n}}`,
    symbol: { base: 'ν', sub: n },
    label: `light mass ${n}`,
    unit: '',
    role: 'mass',
    field,
    range: [0, LIGHTEST],
    circular: false,
    defaultPrior: { kind: 'uniform', lo: 0, hi: 1.4 },
  };
}

/** True for the mass parameter of a light field, ν, which has no frequency. */
export function isLightMass({ role, symbol }: Pick<ParameterDeclaration, 'role' | 'symbol'>): boolean {
  return role === 'mass' && symbol.base === 'ν';
}

/** a (cosine) or b (sine) of field `field`. */
export function quadratureParameter(field: number, which: 'a' | 'b'): ParameterDeclaration {
  const n = String(field + 1);
  return {
    name: `${which}${n}`,
    tex: `${which}_{${n}}`,
    symbol: { base: which, sub: n },
    label: `${which === 'a' ? 'cosine' : 'sine'} amplitude ${n}`,
    unit: '',
    role: 'quadrature',
    field,
    range: [-Infinity, Infinity],
    circular: false,
    defaultPrior: { kind: 'normal', mean: 0, sd: 1 },
  };
}

/** A ≥ 0 of field `field`. */
export function amplitudeParameter(field: number): ParameterDeclaration {
  const n = String(field + 1);
  return {
    name: `A${n}`,
    tex: `A_{${n}}`,
    symbol: { base: 'A', sub: n },
    label: `amplitude ${n}`,
    unit: '',
    role: 'amplitude',
    field,
    range: [0, Infinity],
    circular: false,
    defaultPrior: { kind: 'uniform', lo: 0, hi: 3 },
  };
}

/** φ of field `field`, radians in (−π, π]. */
export function phaseParameter(field: number): ParameterDeclaration {
  const n = String(field + 1);
  return {
    name: `phi${n}`,
    tex: `\\varphi_{${n}}`,
    symbol: { base: 'φ', sub: n },
    label: `phase ${n}`,
    unit: 'rad',
    role: 'phase',
    field,
    range: [-Math.PI, Math.PI],
    circular: true,
    defaultPrior: { kind: 'uniform', lo: -Math.PI, hi: Math.PI },
  };
}

/** The N − 1 mixing angles of `fields` fields, radians in [0, π/2]; none for one field. */
export function angleParameters(fields: number): ParameterDeclaration[] {
  const one = (name: string, tex: string, base: string, sub: string): ParameterDeclaration => ({
    name,
    tex,
    symbol: { base, sub },
    label: sub === '' ? 'mixing angle' : `mixing angle ${sub}`,
    unit: 'rad',
    role: 'angle',
    field: null,
    range: [0, Math.PI / 2],
    circular: false,
    defaultPrior: { kind: 'isotropic' },
  });
  if (fields === 2) return [one('theta', '\\theta', 'θ', '')];
  if (fields === 3)
    return [one('theta12', '\\theta_{12}', 'θ', '12'), one('theta13', '\\theta_{13}', 'θ', '13')];
  return Array.from({ length: fields - 1 }, (_, i) =>
    one(`angle${i + 1}`, `\\vartheta_{${i + 1}}`, 'ϑ', String(i + 1)),
  );
}

/** g, the product of couplings, of either sign. */
export function couplingParameter(): ParameterDeclaration {
  return {
    name: 'g',
    tex: 'g',
    symbol: { base: 'g', sub: '' },
    label: 'coupling',
    unit: '',
    role: 'coupling',
    field: null,
    range: [-Infinity, Infinity],
    circular: false,
    defaultPrior: { kind: 'normal', mean: 0, sd: 30 },
  };
}

/** α in cos α Ŝ₁ + sin α Ŝ₂, radians in (−π/2, π/2]; the other half of the circle is g → −g. */
export function vertexAngleParameter(): ParameterDeclaration {
  return {
    name: 'alpha',
    tex: '\\alpha',
    symbol: { base: 'α', sub: '' },
    label: 'vertex angle',
    unit: 'rad',
    role: 'vertex-angle',
    field: null,
    range: [-Math.PI / 2, Math.PI / 2],
    circular: false,
    defaultPrior: { kind: 'uniform', lo: -Math.PI / 2, hi: Math.PI / 2 },
  };
}

/** Name of the coefficient of κ^p: cm1, c0, … c4. */
export function backgroundName(power: number): string {
  return power < 0 ? `cm${-power}` : `c${power}`;
}

/** The coefficients of the smooth background, in the order of the powers. */
export function backgroundParameters(powers: readonly number[]): ParameterDeclaration[] {
  return powers.map((power) => ({
    name: backgroundName(power),
    tex: `c_{${power}}`,
    symbol: { base: 'c', sub: String(power).replace('-', '−') },
    label: power === 0 ? 'background constant' : `background κ${SUPERSCRIPTS[String(power)] ?? ''}`,
    unit: '',
    role: 'background',
    field: null,
    range: [-Infinity, Infinity],
    circular: false,
    defaultPrior: { kind: 'normal', mean: 0, sd: 3 },
  }));
}

/** Dimensionless power of the curvature perturbation that turns g into couplings. */
const CURVATURE_POWER = 2.1e-9;

/** ρ/Λ = (ρ/H)(H/Λ) = −2π √P_ζ g, dimensionless, at P_ζ = 2.1 × 10⁻⁹, for g at `index` of the parameter vector. */
export function couplingRatio(index: number): DerivedDeclaration {
  return {
    name: 'rho_over_Lambda',
    tex: '\\rho/\\Lambda',
    symbol: { base: 'ρ/Λ', sub: '' },
    label: 'mixing over cutoff scale',
    unit: '',
    field: null,
    evaluate: (x) => -2 * Math.PI * Math.sqrt(CURVATURE_POWER) * x[index],
  };
}

/** m²/H² = 9/4 + μ² of a heavy field, 9/4 − ν² of a light one. */
export function squaredMass(kind: FieldKind, mass: number): number {
  return kind === 'heavy' ? 2.25 + mass * mass : 2.25 - mass * mass;
}

/** m/H of a field whose mass parameter stands at `index` of the parameter vector. */
export function massInHubbleUnits(
  field: number,
  index: number,
  kind: FieldKind = 'heavy',
): DerivedDeclaration {
  const n = String(field + 1);
  return {
    name: `m${n}_over_H`,
    tex: `m_{${n}}/H`,
    symbol: { base: 'm', sub: n },
    label: `mass of field ${n}`,
    unit: 'H',
    field,
    evaluate: (x) => Math.sqrt(squaredMass(kind, x[index])),
  };
}
