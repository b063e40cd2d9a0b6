import { buildInference } from '@/lib/inference';
import { compileTemplate } from '@/lib/templates';
import { evaluationRate } from './p1';

export interface CostOfBins {
  bins: number;
  covariance: 'full' | 'diagonal';
  microseconds: number;
}

/** CPU microseconds of one likelihood evaluation of two free-phase fields against the number of bins. */
export function costAgainstBins(): CostOfBins[] {
  return [20, 40, 80, 160, 320].flatMap((bins) =>
    (['full', 'diagonal'] as const).map((covariance) => {
      const kappa = Float64Array.from({ length: bins }, (_, i) => 0.004 * 75 ** (i / (bins - 1)));
      const template = compileTemplate(
        'free-phase',
        { fields: 2, background: [1, 2] },
        { kind: 'points', kappa },
      );
      const inference = buildInference({
        data: {
          S: kappa.map((x) => Math.sqrt(x) * Math.cos(2 * Math.log(x))),
          // Neighbouring bins correlated by 0.3, as shared long modes make them.
          covariance: Float64Array.from({ length: bins * bins }, (_, k) => {
            const distance = Math.abs(Math.floor(k / bins) - (k % bins));
            return covariance === 'full' ? 0.01 * 0.3 ** distance : distance === 0 ? 0.01 : 0;
          }),
          mockCount: null,
        },
        likelihood: 'normal',
        template,
        priors: Object.fromEntries(template.parameters.map((p) => [p.name, p.defaultPrior])),
      });
      return { bins, covariance, microseconds: 1e6 / evaluationRate(inference, 20_000) };
    }),
  );
}
