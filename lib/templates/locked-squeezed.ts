import { declareTemplate } from './declaration';
import { averageDefinition, backgroundTerms, binMean, fieldClass, sumFormula } from './formula';
import { mixingDefinition, mixingDerived, weightTex } from './mixing-derived';
import { mixingWeights } from './mixing';
import { choiceOption, integerOption, sharedOptions, vertexOption } from './options';
import {
  angleParameters,
  backgroundParameters,
  couplingParameter,
  massInHubbleUnits,
  massParameter,
  phaseParameter,
  vertexAngleParameter,
} from './parameters';
import {
  squeezedLogModulus,
  writeMixtureCoefficient,
  writeSqueezedCoefficient,
} from './squeezed-coefficient';
import type { Vertex } from './types';

const options = {
  fields: integerOption(1, 4, 1, 'Number of heavy fields.'),
  vertex: vertexOption,
  phases: choiceOption(
    ['locked', 'free'],
    'locked',
    'Whether each phase is that of the interaction or free, with the amplitude |C(μ)| kept.',
  ),
  ...sharedOptions,
};

interface Layout {
  fields: number;
  vertex: Vertex | 'mixture';
  phases: 'locked' | 'free';
}

/** Where the parameters stand: μ of every field, angles, g, phases if free, α of a mixture, background. */
function positions(o: Layout) {
  const angles = o.fields;
  const coupling = angles + o.fields - 1;
  const phases = coupling + 1;
  return { angles, coupling, phases, alpha: phases + (o.phases === 'free' ? o.fields : 0) };
}

function eachField<T>(fields: number, make: (field: number) => T): T[] {
  return Array.from({ length: fields }, (_, field) => make(field));
}

/**
 * The coefficients g w_i (Re C(μ_i), −Im C(μ_i)), or g w_i |C(μ_i)| (cos φ_i, −sin φ_i) with free phases.
 * A mass of 0 has no coefficient: TemplateError `invalid_mass`.
 */
function coefficientWriter(o: Layout): (x: ArrayLike<number>, out: Float64Array) => void {
  const { fields, vertex } = o;
  const freePhases = o.phases === 'free';
  const at = positions(o);
  const angles = new Float64Array(fields - 1);
  const weights = new Float64Array(fields);
  const c = new Float64Array(2);
  return (x, out) => {
    for (let k = 0; k < angles.length; k += 1) angles[k] = x[at.angles + k];
    mixingWeights(angles, weights);
    const g = x[at.coupling];
    for (let i = 0; i < fields; i += 1) {
      const strength = g * weights[i];
      if (freePhases) {
        let modulus: number;
        if (vertex === 'mixture') {
          writeMixtureCoefficient(x[i], x[at.alpha], c);
          modulus = Math.exp(0.5 * Math.log(c[0] * c[0] + c[1] * c[1]));
        } else {
          modulus = Math.exp(squeezedLogModulus(x[i], vertex));
        }
        const phase = x[at.phases + i];
        out[2 * i] = strength * modulus * Math.cos(phase);
        out[2 * i + 1] = -strength * modulus * Math.sin(phase);
      } else {
        if (vertex === 'mixture') writeMixtureCoefficient(x[i], x[at.alpha], c);
        else writeSqueezedCoefficient(x[i], vertex, c);
        out[2 * i] = strength * c[0];
        out[2 * i + 1] = -strength * c[1];
      }
    }
  };
}

const FIRST_TEX =
  '\\mathcal{C}_1(\\mu) = \\frac{\\sqrt{\\pi}}{16}\\,\\frac{1 + i\\sinh\\pi\\mu}{\\cosh\\pi\\mu}\\,4^{-i\\mu}\\,' +
  '\\Gamma(\\tfrac{5}{2} + i\\mu)\\,\\Gamma(-i\\mu)';
const SECOND_TEX =
  '\\mathcal{C}_2(\\mu) = -\\,\\mathcal{C}_1(\\mu)\\,\\frac{\\tfrac{9}{2} + i\\mu}{\\tfrac{1}{2} + i\\mu}';
const MIXTURE_TEX =
  '\\mathcal{C}(\\mu) = \\cos\\alpha\\;\\mathcal{C}_1(\\mu) + \\sin\\alpha\\;\\mathcal{C}_2(\\mu)';

/**
 * g Σ_i w_i ⟨κ^{1/2} Re[C(μ_i) κ^{iμ_i}]⟩ + Σ_p c_p ⟨κ^p⟩: single exchange of N heavy mass eigenstates of which one
 * flavour couples, in the leading squeezed limit. With free phases g Σ_i w_i |C(μ_i)| ⟨κ^{1/2} cos(μ_i ln κ + φ_i)⟩.
 */
export const lockedSqueezed = declareTemplate({
  id: 'locked-squeezed',
  version: 1,
  title: 'Single exchange of mixed fields',
  summary:
    'Amplitudes and phases follow from the exchange of heavy fields at tree level, shared out by mixing weights that add up to one. It gives mixing angles and elements of the mass matrix.',
  assumptions: [
    'One flavour couples, at both vertices.',
    'Weak mixing, unit sound speed, exact scale invariance.',
    'Heavy fields: every m > 3H/2.',
    'Leading squeezed behaviour of the oscillation; the smooth part of the exchange is left to the background.',
  ],
  options,
  structure: (o) => (o.phases === 'locked' ? 'mixed' : 'mixed-polar'),
  formula(o) {
    const averaged = o.binAverage !== false;
    const c = o.vertex === 'mixture' ? '\\mathcal{C}' : `\\mathcal{C}_${o.vertex}`;
    const terms = eachField(o.fields, (i) => {
      const mu = `\\mu_{${i + 1}}`;
      const oscillation =
        o.phases === 'locked'
          ? binMean(`\\kappa^{1/2}\\,\\mathrm{Re}\\bigl[${c}(${mu})\\,\\kappa^{i${mu}}\\bigr]`, averaged)
          : `|${c}(${mu})|${binMean(`\\kappa^{1/2}\\cos(${mu}\\ln\\kappa + \\varphi_{${i + 1}})`, averaged)}`;
      return fieldClass(i, `g\\,${weightTex(o.fields, i)}${oscillation}`);
    });
    return sumFormula(terms, backgroundTerms(o.background, averaged), [
      ...mixingDefinition(o.fields),
      ...(o.vertex === 'mixture' ? [MIXTURE_TEX] : []),
      FIRST_TEX,
      ...(o.vertex === 1 ? [] : [SECOND_TEX]),
      ...averageDefinition(averaged, o.binWeight),
    ]);
  },
  parameters: (o) => [
    ...eachField(o.fields, (i) => ({ ...massParameter(i), exclusiveMinimum: true })),
    ...angleParameters(o.fields),
    couplingParameter(),
    ...(o.phases === 'free' ? eachField(o.fields, phaseParameter) : []),
    ...(o.vertex === 'mixture' ? [vertexAngleParameter()] : []),
    ...backgroundParameters(o.background),
  ],
  derived: (o) => [
    ...eachField(o.fields, (i) => massInHubbleUnits(i, i)),
    ...mixingDerived(
      eachField(o.fields, (i) => i),
      positions(o).angles,
    ),
  ],
  masses: (o) => eachField(o.fields, (i) => i),
  fieldCoefficients: (o) => coefficientWriter(o),
});
