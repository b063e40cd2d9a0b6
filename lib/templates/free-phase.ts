import { declareTemplate } from './declaration';
import { averageDefinition, backgroundTerms, binMean, fieldClass, sumFormula } from './formula';
import { choiceOption, integerOption, sharedOptions } from './options';
import {
  amplitudeParameter,
  backgroundParameters,
  massInHubbleUnits,
  massParameter,
  phaseParameter,
  quadratureParameter,
} from './parameters';

const options = {
  fields: integerOption(1, 4, 1, 'Number of heavy fields.'),
  amplitudes: choiceOption(
    ['quadrature', 'amplitude-phase'],
    'quadrature',
    'Each oscillation as a cosine and a sine amplitude, or as an amplitude and a phase.',
  ),
  ...sharedOptions,
};

/** Parameters of one field: its mass and two for its oscillation. */
const PER_FIELD = 3;

function massIndices(fields: number): number[] {
  return Array.from({ length: fields }, (_, i) => PER_FIELD * i);
}

/**
 * Σ_i ⟨κ^{1/2} [a_i cos(μ_i ln κ) + b_i sin(μ_i ln κ)]⟩ + Σ_p c_p ⟨κ^p⟩ with a_i, b_i free, or
 * A_i κ^{1/2} cos(μ_i ln κ + φ_i), for which a = A cos φ and b = −A sin φ. No pivot: κ = 1 is where the phase counts from.
 */
export const freePhase = declareTemplate({
  id: 'free-phase',
  version: 1,
  title: 'Oscillations with free amplitude and phase',
  summary:
    'One oscillation in ln κ for each heavy field, with any amplitude and any phase, on a smooth background. It makes no assumption about the interaction, so it has no mixing angle.',
  assumptions: [
    'Heavy fields: every m > 3H/2.',
    'Leading squeezed behaviour κ^{1/2} of each oscillation; corrections of relative order κ² are left out.',
  ],
  options,
  structure: (o) => (o.amplitudes === 'quadrature' ? 'linear' : 'polar'),
  formula(o) {
    const averaged = o.binAverage !== false;
    const terms = massIndices(o.fields).map((_, i) => {
      const n = i + 1;
      const tex =
        o.amplitudes === 'quadrature'
          ? binMean(
              `\\kappa^{1/2}\\bigl[a_{${n}}\\cos(\\mu_{${n}}\\ln\\kappa) + b_{${n}}\\sin(\\mu_{${n}}\\ln\\kappa)\\bigr]`,
              averaged,
            )
          : `A_{${n}}${binMean(`\\kappa^{1/2}\\cos(\\mu_{${n}}\\ln\\kappa + \\varphi_{${n}})`, averaged)}`;
      return fieldClass(i, tex);
    });
    return sumFormula(
      terms,
      backgroundTerms(o.background, averaged),
      averageDefinition(averaged, o.binWeight),
    );
  },
  parameters: (o) => [
    ...massIndices(o.fields).flatMap((_, i) =>
      o.amplitudes === 'quadrature'
        ? [massParameter(i), quadratureParameter(i, 'a'), quadratureParameter(i, 'b')]
        : [massParameter(i), amplitudeParameter(i), phaseParameter(i)],
    ),
    ...backgroundParameters(o.background),
  ],
  derived: (o) => massIndices(o.fields).map((index, i) => massInHubbleUnits(i, index)),
  masses: (o) => massIndices(o.fields),
  fieldCoefficients({ fields, amplitudes }) {
    if (amplitudes === 'quadrature') {
      return (x, out) => {
        for (let i = 0; i < fields; i += 1) {
          out[2 * i] = x[PER_FIELD * i + 1];
          out[2 * i + 1] = x[PER_FIELD * i + 2];
        }
      };
    }
    return (x, out) => {
      for (let i = 0; i < fields; i += 1) {
        const amplitude = x[PER_FIELD * i + 1];
        const phase = x[PER_FIELD * i + 2];
        out[2 * i] = amplitude * Math.cos(phase);
        out[2 * i + 1] = -amplitude * Math.sin(phase);
      }
    };
  },
});
