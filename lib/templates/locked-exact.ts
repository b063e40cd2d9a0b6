import { declareTemplate } from './declaration';
import { exactHeavyColumns, exactLightColumns } from './exchange-columns';
import {
  exchangeCoefficients,
  exchangeDerived,
  exchangeFills,
  exchangeFormula,
  exchangeParameters,
  fieldKinds,
} from './exchange-template';
import { fieldsOption, powersOption, sharedOptions, vertexOption } from './options';

const options = {
  fields: fieldsOption(
    4,
    1,
    'Number of heavy fields, or a list that says of each whether it is heavy or light.',
  ),
  vertex: vertexOption,
  ...sharedOptions,
  background: powersOption(0, [], 'Powers of κ in the smooth background, from −1 to 4.'),
};

const TOTAL_TEX =
  '\\hat S^{\\,\\mathrm{tot}}(\\kappa) = \\hat S(k_1,k_2;k_3) + \\hat S(k_2,k_3;k_1) + \\hat S(k_3,k_1;k_2),\\quad k_1 = k_2 = k_3/\\kappa';
const FIRST_TEX =
  '\\hat S_1(k_a,k_b;k_m) = \\tfrac{q}{2}\\,\\theta(\\theta+1)\\,h(r),\\quad r = \\tfrac{k_m}{k_a+k_b},\\; q = \\tfrac{k_a k_b}{(k_a+k_b)^2},\\; \\theta = r\\tfrac{\\mathrm d}{\\mathrm dr}';
const SECOND_TEX =
  '\\hat S_2(k_a,k_b;k_m) = -\\tfrac12\\,\\tfrac{k_a^2+k_b^2-k_m^2}{2k_ak_b}\\,(1+\\theta)(1+q\\theta)\\,h(r)';
const EQUATION_TEX =
  '\\bigl[(\\theta-\\tfrac12)^2 + \\tfrac{m^2}{H^2} - \\tfrac94\\bigr]h = r^2\\theta(\\theta+1)h + \\tfrac{r}{1+r},\\quad h\\ \\text{regular at}\\ r = 1';

/**
 * g Σ_i w_i ⟨Ŝ_total(m_i, κ)⟩ + background: single exchange of mixed fields, heavy or light, exact at tree level at every κ < 2,
 * all three permutations, oscillating and smooth part together (exact-shape.ts).
 */
export const lockedExact = declareTemplate({
  id: 'locked-exact',
  version: 1,
  title: 'Single exchange of mixed fields, exact shape',
  summary:
    'The whole tree-level shape of single exchange, oscillating and smooth part and all three permutations, for heavy and light fields that share one coupling. It needs no smooth background of its own and holds outside the squeezed limit too.',
  assumptions: [
    'One flavour couples, at both vertices.',
    'Weak mixing, unit sound speed, exact scale invariance.',
    'Isosceles triangles; others are evaluated at κ = 2k₃/(k₁ + k₂), and their further corrections, of order κ², are left out.',
    'Heavy fields: 3H/2 < m < 20H. Light fields: the long mode left the horizon late enough for (3/2 − ν) ln 1/κ to be all there is.',
  ],
  options,
  structure: () => 'mixed',
  formula: (o) =>
    exchangeFormula({
      kinds: fieldKinds(o.fields),
      options: o,
      mark: '^{\\,\\mathrm{tot}}',
      shapes: ({ first, second }) => [
        TOTAL_TEX,
        ...(first ? [FIRST_TEX] : []),
        ...(second ? [SECOND_TEX] : []),
        EQUATION_TEX,
      ],
    }),
  parameters: (o) => exchangeParameters(fieldKinds(o.fields), o.vertex, o.background),
  derived: (o) => exchangeDerived(fieldKinds(o.fields)),
  masses: (o) => fieldKinds(o.fields).map((_, i) => i),
  kinds: (o) => fieldKinds(o.fields),
  fieldColumns: (o, axis) =>
    exchangeFills(fieldKinds(o.fields), axis, { heavy: exactHeavyColumns, light: exactLightColumns }),
  fieldCoefficients: (o) => exchangeCoefficients(fieldKinds(o.fields).length, o.vertex),
});
