import { describe, expect, it } from 'vitest';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import { edgesBetweenModes, judgeModes, modeTable, scanModes } from '@/lib/inference/scan';
import { createRng, judgeGate } from '@/lib/sampler';
import { compileTemplate, type Prior } from '@/lib/templates';
import alias from '../../../published/data/posteriors/alias.json';
import { runReplicas } from '../sampling';
import { madeUpSpec } from '../fixtures';

/** The posterior of a frequency with aliases; exact weights derived by us (tests/published/data/posteriors/README.md). */
function aliasSpec(): InferenceSpec {
  const {
    prior_osc: amplitude,
    prior_smooth: smooth,
    smooth_powers: background,
    prior_mu: mass,
  } = alias.model;
  const template = compileTemplate(
    'free-phase',
    { fields: 1, background },
    {
      kind: 'bins',
      lo: Float64Array.from(alias.kappa_lo),
      hi: Float64Array.from(alias.kappa_hi),
      weightPower: 0,
    },
  );
  const normal = ({ mean, sd }: { mean: number; sd: number }): Prior => ({ kind: 'normal', mean, sd });
  return {
    data: {
      S: Float64Array.from(alias.S),
      covariance: Float64Array.from(alias.covariance.flat()),
      mockCount: null,
    },
    likelihood: 'normal',
    template,
    priors: Object.fromEntries(
      template.parameters.map(({ name, role }): [string, Prior] => [
        name,
        role === 'mass'
          ? { kind: 'uniform', lo: mass.lo, hi: mass.hi }
          : normal(role === 'quadrature' ? amplitude : smooth),
      ]),
    ),
  };
}

/** Share of the scan's modes that lie within an interval of the exact table. */
const shareWithin = (modes: readonly { mu: number[]; weight: number }[], lo: number, hi: number): number =>
  modes.reduce((sum, { mu, weight }) => (mu[0] >= lo && mu[0] < hi ? sum + weight : sum), 0);

describe('modes', () => {
  const spec = aliasSpec();
  const inference = buildInference(spec);
  const scan = scanModes(spec, 'seed', inference);

  it('have the exact weights of a frequency with aliases', () => {
    for (const { mu_lo, mu_hi, weight } of alias.exact.one.modes) {
      expect(Math.abs(shareWithin(scan?.modes ?? [], mu_lo, mu_hi) - weight)).toBeLessThan(0.02);
    }
    expect(scan?.missed).toBeNull();
  });

  it('agree with chains that jump, and the gate has nothing to say', { timeout: 60_000 }, () => {
    const { chains } = runReplicas(inference, 4000);
    const table = modeTable(scan!, [chains.mu1]);
    for (const { mu_lo, mu_hi, weight } of alias.exact.one.modes) {
      const rows = table.filter(({ mu }) => mu[0] >= mu_lo && mu[0] < mu_hi);
      const share = rows.reduce((sum, row) => sum + row.weight, 0);
      const error = Math.hypot(...rows.map(({ mcse }) => mcse));
      expect(Math.abs(share - weight)).toBeLessThan(4 * error + 0.003);
    }
    expect(judgeModes(scan!, table)).toEqual([]);
  });

  it('that all replicas missed are told though R-hat is content', () => {
    // What local moves alone give when all replicas start in one mode: exact draws of the posterior within that mode.
    const rng = createRng('one mode');
    const { target, jumps } = inference;
    const x = new Float64Array(target.names.length);
    target.drawPrior(rng, x);
    const within = (mu: number): boolean => mu < alias.exact.one.modes[0].mu_hi;
    const chains = Array.from({ length: 4 }, () => {
      const chain: number[] = [];
      const here = new Float64Array(x.length);
      let log = -Infinity;
      while (chain.length < 2000) {
        jumps[0].draw(rng, here, x);
        const prior = target.logPrior(x);
        const next =
          prior > -Infinity && within(x[0])
            ? prior + target.logLikelihood(x) - jumps[0].logDensity(x, here)
            : -Infinity;
        if (Math.log(rng.uniform()) < next - log) {
          here.set(x);
          log = next;
        }
        if (log > -Infinity) chain.push(here[0]);
      }
      return Float64Array.from(chain);
    });
    expect(judgeGate({ chainsByParameter: { mu1: chains } }).met).toBe(true);
    const reasons = judgeModes(scan!, modeTable(scan!, [chains]));
    expect(reasons.length).toBeGreaterThan(0);
    expect(reasons.join(' ')).toMatch(/no draw.*by the scan.*let the fit run longer/);
  });

  it('of two locked fields: a better place that the jumps don’t reach is named', { timeout: 60_000 }, () => {
    const two = madeUpSpec('locked-squeezed', { fields: 2, vertex: 2, background: [1] }, {}, 0.005);
    const whole = buildInference(two);
    const found = scanModes(two, 'seed', whole);
    expect(found?.missed).toBeNull();
    // A proposal that never leaves a poor corner of the plane stands for a grid that stepped over the best peak.
    const narrow = buildInference({
      ...two,
      priors: {
        ...two.priors,
        mu1: { kind: 'uniform', lo: 6.5, hi: 7 },
        mu2: { kind: 'uniform', lo: 7, hi: 7.5 },
      },
    });
    const stuck = scanModes(two, 'seed', { ...whole, jumps: narrow.jumps });
    expect(stuck?.missed?.by).toBeGreaterThan(15);
    expect(judgeModes(stuck!, []).join(' ')).toMatch(/better by \d+ in ln/);
  });

  it('are divided at minima that are deep enough', () => {
    const x = [0, 1, 2, 3, 4, 5, 6];
    expect(edgesBetweenModes(x, [0, 3, 0, 4, 3.8, 4.1, 0])).toEqual([0, 2, 6]);
    expect(edgesBetweenModes(x, [0, 1, 2, 3, 2, 1, 0])).toEqual([0, 6]);
  });
});
