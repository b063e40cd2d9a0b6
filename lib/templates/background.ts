import { declareTemplate } from './declaration';
import { averageDefinition, backgroundTerms, sumFormula } from './formula';
import { powersOption, sharedOptions } from './options';
import { backgroundParameters } from './parameters';

const options = {
  ...sharedOptions,
  // Without a single power there would be nothing to fit.
  background: powersOption(1, [1, 2], sharedOptions.background.data.description),
};

/** Σ_p c_p ⟨κ^p⟩: a smooth signal with no field in it, against which oscillations are judged. */
export const background = declareTemplate({
  id: 'background',
  version: 1,
  title: 'Smooth background',
  summary:
    'A sum of whole powers of κ and no oscillation. It is the null model that every oscillating template is compared with.',
  assumptions: [],
  options,
  structure: () => 'background',
  formula: (o) =>
    sumFormula(
      [],
      backgroundTerms(o.background, o.binAverage !== false),
      averageDefinition(o.binAverage !== false, o.binWeight),
    ),
  parameters: (o) => backgroundParameters(o.background),
  derived: () => [],
  masses: () => [],
  fieldCoefficients: () => () => undefined,
});
