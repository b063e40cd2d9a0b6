import { declareTemplate } from './declaration';
import { leadingLightColumns } from './exchange-columns';
import {
  exchangeCoefficients,
  exchangeDerived,
  exchangeFills,
  exchangeFormula,
  exchangeParameters,
} from './exchange-template';
import { integerOption, sharedOptions, vertexOption } from './options';
import type { FieldKind } from './types';

const options = {
  fields: integerOption(1, 4, 1, 'Number of light fields.'),
  vertex: vertexOption,
  ...sharedOptions,
};

function lightKinds(fields: number): FieldKind[] {
  return new Array<FieldKind>(fields).fill('light');
}

const SHAPE_TEX =
  '\\hat S(\\nu, \\kappa) = c_-(\\nu)\\,\\kappa^{1/2-\\nu} + c_+(\\nu)\\,\\kappa^{1/2+\\nu} + a_0(\\nu)\\,\\kappa';
const FIRST_TEX =
  'c_\\pm = \\tfrac{\\sqrt\\pi}{32}\\,4^{\\mp\\nu}\\tan\\bigl(\\tfrac\\pi4 \\pm \\tfrac{\\pi\\nu}{2}\\bigr)\\Gamma(\\tfrac52\\pm\\nu)\\Gamma(\\mp\\nu),\\quad a_0 = \\tfrac{1}{8(1/4-\\nu^2)}\\quad (\\hat S_1)';
const SECOND_TEX =
  'c_\\pm \\to -\\,c_\\pm\\,\\frac{9/2\\pm\\nu}{1/2\\pm\\nu},\\quad a_0 \\to -5\\,a_0\\quad (\\hat S_2)';

/**
 * g Σ_i w_i ⟨c₋ κ^{1/2−ν_i} + c₊ κ^{1/2+ν_i} + a₀ κ⟩ + background: single exchange of light fields in the squeezed limit
 * (light-coefficients.ts, where the neighbourhood of ν = 1 is described).
 */
export const light = declareTemplate({
  id: 'light',
  version: 1,
  title: 'Single exchange of light fields',
  summary:
    'Power laws between √κ and 1/κ in place of an oscillation: fields lighter than 3H/2 that share one coupling, in the squeezed limit.',
  assumptions: [
    'One flavour couples, at both vertices.',
    'Weak mixing, unit sound speed, exact scale invariance.',
    'Light fields: every m < 3H/2, and (3/2 − ν) ln 1/κ is all that the field has decayed.',
    'Three leading terms of the long leg’s permutation; from ν = 3/4 on the first one’s κ² correction, whose pole at ν = 1 cancels that of the second, is taken in. What is left out is smooth in κ and goes to the background.',
  ],
  options,
  structure: () => 'mixed',
  formula: (o) =>
    exchangeFormula({
      kinds: lightKinds(o.fields),
      options: o,
      mark: '',
      shapes: ({ second }) => [SHAPE_TEX, FIRST_TEX, ...(second ? [SECOND_TEX] : [])],
    }),
  parameters: (o) => exchangeParameters(lightKinds(o.fields), o.vertex, o.background),
  derived: (o) => exchangeDerived(lightKinds(o.fields)),
  masses: (o) => lightKinds(o.fields).map((_, i) => i),
  kinds: (o) => lightKinds(o.fields),
  fieldColumns: (o, axis) => exchangeFills(lightKinds(o.fields), axis, { light: leadingLightColumns }),
  fieldCoefficients: (o) => exchangeCoefficients(o.fields, o.vertex),
});
