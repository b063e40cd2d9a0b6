import type { InferenceSpec } from '@/lib/inference';
import { compileTemplate, type Axis, type Prior } from '@/lib/templates';

/** 16 bins from 0.01 to 0.25, even in ln κ. */
export const binned: Axis = {
  kind: 'bins',
  lo: Float64Array.from({ length: 16 }, (_, i) => 0.01 * 25 ** (i / 16)),
  hi: Float64Array.from({ length: 16 }, (_, i) => 0.01 * 25 ** ((i + 1) / 16)),
  weightPower: 0,
};

/** A made-up measurement: an oscillation, a slope and a fixed jitter; correlated errors of size `noise`. */
export function madeUpData(noise: number, mockCount: number | null = null): InferenceSpec['data'] {
  const p = 16;
  const S = Float64Array.from({ length: p }, (_, i) => {
    const x = Math.log(0.01) + ((i + 0.5) / p) * Math.log(25);
    return 0.1 * Math.exp(x / 2) * Math.cos(2.3 * x + 0.7) + 0.2 * Math.exp(x) + 0.01 * Math.sin(17 * i);
  });
  const covariance = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < p; j += 1) covariance[i * p + j] = noise * noise * 0.3 ** Math.abs(i - j);
  }
  return { S, covariance, mockCount };
}

/** A posterior of made-up data with default priors, some of them replaced. */
export function madeUpSpec(
  id: string,
  options: Record<string, unknown>,
  priors: Record<string, Prior> = {},
  noise = 0.05,
): InferenceSpec {
  const template = compileTemplate(id, options, binned);
  return {
    data: madeUpData(noise),
    likelihood: 'normal',
    template,
    priors: Object.fromEntries(template.parameters.map((p) => [p.name, priors[p.name] ?? p.defaultPrior])),
  };
}
