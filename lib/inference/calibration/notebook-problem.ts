import type { SamplerSettings } from '@/lib/sampler';
import { buildInference } from '../build-inference';
import type { Inference, InferenceSpec } from '../types';
import type { CalibrationProblem } from './rank-dataset';
import { buildNoise } from './simulate';

/**
 * Calibration of a posterior by its own model: a truth from the prior, the template's prediction there, and noise as the
 * likelihood takes the data to scatter, at the covariance as given. Then (truth, data) is a draw of prior × likelihood,
 * and so the truth's rank among draws of the posterior of those data is uniform, whatever the likelihood's kind: for the
 * t forms because they are themselves densities of the data at a fixed sample covariance S, a multivariate t with m − p
 * degrees of freedom, which `buildNoise` draws. Whether S is a fair estimate isn't asked. The measured values of `spec`
 * aren't used: they are replaced by simulated ones.
 *
 * @param spec its template compiled on the axis of the data after cuts
 * @param settings how a posterior with such blocks is sampled
 * @param fitted what the data are fitted with in place of `spec`, with their values put in: a planted fault, in tests
 */
export function calibrationProblem(
  spec: InferenceSpec,
  settings: (blocks: Inference['blocks']) => SamplerSettings,
  fitted: InferenceSpec = spec,
): CalibrationProblem {
  const { data, likelihood, template } = spec;
  const withValues = (of: InferenceSpec, S: Float64Array): Inference =>
    buildInference({ ...of, data: { ...of.data, S } });
  const prior = withValues(spec, new Float64Array(data.S.length));
  const scatter = buildNoise(likelihood, data, prior.sampled.length);
  return {
    draw(rng) {
      const truth = new Float64Array(prior.sampled.length);
      prior.target.drawPrior(rng, truth);
      const prediction = template.predict(prior.expand(truth));
      const noise = scatter(rng);
      return { truth, data: noise.map((value, i) => value + prediction[i]) };
    },
    fit: (values) => withValues(fitted, values),
    settings,
  };
}
