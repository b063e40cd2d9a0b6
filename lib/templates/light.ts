import { declareTemplate } from './declaration';
import { leadingLightColumns } from './exchange-columns';
import {
  exchangeCoefficients,
  exchangeDerived,
  exchangeFills,
  exchangeParameters,
  massTex,
} from './exchange-template';
import { averageDefinition, backgroundTerms, binMean, fieldClass, sumFormula } from './formula';
import { mixingDefinition, weightTex } from './mixing-derived';
import { choiceOption, integerOption, sharedOptions } from './options';
import type { FieldKind } from './types';

const options = {
  fields: integerOption(1, 4, 1, 'Number of light fields.'),
  vertex: choiceOption(
    [1, 2, 'mixture'],
    1,
    'Cubic interaction: 1 is π̇²σ/Λ₁, 2 is (∂π)²σ/(a²Λ₂), mixture is cos α of the first and sin α of the second.',
  ),
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
const MIXTURE_TEX = '\\hat S = \\cos\\alpha\\;\\hat S_1 + \\sin\\alpha\\;\\hat S_2';

/**
 * g Σ_i w_i ⟨c₋ κ^{1/2−ν_i} + c₊ κ^{1/2+ν_i} + a₀ κ⟩ + background: single exchange of light fields in the squeezed limit
 * (light-coefficients.ts, where the neighbourhood of ν = 1 is described).
 */
export const light = declareTemplate({
  id: 'light',
  version: 1,
  title: 'Single exchange of light fields',
  summary:
    'Power laws between κ^{1/2} and κ^{−1} in place of an oscillation: fields lighter than 3H/2 that share one coupling, in the squeezed limit.',
  assumptions: [
    'One flavour couples, at both vertices.',
    'Weak mixing, unit sound speed, exact scale invariance.',
    'Light fields: every m < 3H/2, and (3/2 − ν) ln 1/κ is all that the field has decayed.',
    'Three leading terms of the long leg’s permutation; from ν = 3/4 on the first one’s κ² correction, whose pole at ν = 1 cancels that of the second, is taken in. What is left out is smooth in κ and goes to the background.',
  ],
  options,
  structure: () => 'mixed',
  formula(o) {
    const averaged = o.binAverage !== false;
    const kinds = lightKinds(o.fields);
    const shape = o.vertex === 'mixture' ? '\\hat S' : `\\hat S_${o.vertex}`;
    const terms = kinds.map((_, i) =>
      fieldClass(
        i,
        `g\\,${weightTex(kinds.length, i)}${binMean(`${shape}(${massTex(kinds, i)}, \\kappa)`, averaged)}`,
      ),
    );
    return sumFormula(terms, backgroundTerms(o.background, averaged), [
      ...mixingDefinition(kinds.length),
      ...(o.vertex === 'mixture' ? [MIXTURE_TEX] : []),
      SHAPE_TEX,
      FIRST_TEX,
      ...(o.vertex === 1 ? [] : [SECOND_TEX]),
      ...averageDefinition(averaged, o.binWeight),
    ]);
  },
  parameters: (o) => exchangeParameters(lightKinds(o.fields), o.vertex, o.background),
  derived: (o) => exchangeDerived(lightKinds(o.fields)),
  masses: (o) => lightKinds(o.fields).map((_, i) => i),
  kinds: (o) => lightKinds(o.fields),
  fieldColumns: (o, axis) => exchangeFills(lightKinds(o.fields), axis, { light: leadingLightColumns }),
  fieldCoefficients: (o) => exchangeCoefficients(o.fields, o.vertex),
});
