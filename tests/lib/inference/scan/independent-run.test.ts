import { describe, expect, it } from 'vitest';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import { IndependentRun, judgeModes, modeTable } from '@/lib/inference/scan';
import { advance, createRng, judgeGate, startReplica } from '@/lib/sampler';
import { compileTemplate, type Prior } from '@/lib/templates';
import { runReplicas } from '../sampling';

/**
 * Three fields on points that lie 0.5 apart in ln κ, shifted a little at random: μ and 4π − μ look nearly alike, and only the
 * largest mass has its double within the prior's range. Two modes, of unequal weight.
 */
const LO = 0.2;
const HI = 8.2;
const NOISE = 0.3;
const SD = 1;
const truth = { mu1: 1.2, a1: 1.1, b1: 0.6, mu2: 3, a2: -0.8, b2: 0.9, mu3: 4.9, a3: 1, b3: -0.9, c1: 0.4 };

function threeFields(): InferenceSpec {
  const rng = createRng('points of three fields');
  const kappa = Float64Array.from({ length: 14 }, (_, i) =>
    Math.exp(-4.5 + 0.25 + 0.5 * (i - 7) + 0.006 * rng.normal()),
  );
  const template = compileTemplate('free-phase', { fields: 3, background: [1] }, { kind: 'points', kappa });
  const clean = template.predict(template.parameters.map(({ name }) => truth[name as keyof typeof truth]));
  // The same signal-to-noise at every point: columns fall as a power of κ.
  const sizes = Float64Array.from(kappa, (at) => NOISE * Math.sqrt(at));
  const p = kappa.length;
  const covariance = new Float64Array(p * p);
  sizes.forEach((size, i) => (covariance[i * p + i] = size * size));
  const S = clean.map((value, i) => value + sizes[i] * rng.normal());
  const priors = Object.fromEntries(
    template.parameters.map(({ name, role }): [string, Prior] => [
      name,
      role === 'mass' ? { kind: 'uniform', lo: LO, hi: HI } : { kind: 'normal', mean: 0, sd: SD },
    ]),
  );
  return { data: { S, covariance, mockCount: null }, likelihood: 'normal', template, priors };
}

const spec = threeFields();
const inference = buildInference(spec);
const start = () => IndependentRun.of(spec, 'seed', () => inference)!;
const found = start().modesAt(800);

/** ln N(S; 0, Σ + B D Bᵀ) with every column of the linear terms from the template's own prediction: nothing of the engine. */
function logEvidence(columns: readonly Float64Array[]): number {
  const { S, covariance } = spec.data;
  const p = S.length;
  const a = Float64Array.from(covariance);
  for (const column of columns)
    for (let i = 0; i < p; i += 1)
      for (let j = 0; j <= i; j += 1) a[i * p + j] += SD * SD * column[i] * column[j];
  const z = Float64Array.from(S);
  let log = 0;
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = a[i * p + j];
      for (let k = 0; k < j; k += 1) sum -= a[i * p + k] * a[j * p + k];
      a[i * p + j] = i === j ? Math.sqrt(sum) : sum / a[j * p + j];
    }
    for (let k = 0; k < i; k += 1) z[i] -= a[i * p + k] * z[k];
    z[i] /= a[i * p + i];
    log -= 0.5 * z[i] * z[i] + Math.log(a[i * p + i]);
  }
  return log;
}

/** Shares of the boxes by the midpoint rule over all ordered triples of a grid. */
function quadratureShares(cells: number): number[] {
  const index = (name: string): number => spec.template.parameters.findIndex((each) => each.name === name);
  const unit = (name: string, mass: number): Float64Array => {
    const full = new Float64Array(spec.template.parameters.length);
    for (const f of [1, 2, 3]) full[index(`mu${f}`)] = mass;
    full[index(name)] = 1;
    return Float64Array.from(spec.template.predict(full));
  };
  const mu = Array.from({ length: cells }, (_, i) => LO + ((i + 0.5) * (HI - LO)) / cells);
  const fields = mu.map((mass) => [unit('a1', mass), unit('b1', mass)]);
  const background = unit('c1', 1);
  const logs: number[] = [];
  const boxes: number[] = [];
  for (let i = 0; i < cells; i += 1)
    for (let j = i + 1; j < cells; j += 1)
      for (let k = j + 1; k < cells; k += 1) {
        const at = [mu[i], mu[j], mu[k]];
        boxes.push(found.modes.findIndex(({ lo, hi }) => at.every((m, d) => m >= lo[d] && m < hi[d])));
        logs.push(logEvidence([...fields[i], ...fields[j], ...fields[k], background]));
      }
  const top = logs.reduce((a, b) => Math.max(a, b));
  const shares = found.modes.map(() => 0);
  let total = 0;
  logs.forEach((log, n) => {
    const weight = Math.exp(log - top);
    total += weight;
    if (boxes[n] >= 0) shares[boxes[n]] += weight;
  });
  return shares.map((share) => share / total);
}

describe('an independent run', () => {
  it('has the shares of the modes of three fields that brute-force quadrature has', () => {
    expect(found.modes.length).toBeGreaterThan(1);
    const exact = quadratureShares(100);
    found.modes.forEach(({ weight, error }, k) => {
      expect(error).toBeLessThan(0.02);
      expect(Math.abs(weight - exact[k])).toBeLessThan(4 * error);
    });
  });

  it('lets a healthy fit pass', () => {
    const { chains } = runReplicas(inference, 2000);
    const masses = found.names.map((name) => chains[name]);
    expect(judgeGate({ chainsByParameter: chains }).met).toBe(true);
    expect(judgeModes(found, modeTable(found, masses))).toEqual([]);
  });

  it('fails the gate by the mode table where every replica started in one mode and only walks', () => {
    const { target } = inference;
    const settings = { warmup: 2000, blocks: inference.blocks };
    const draws = 12_000;
    const kept = 3000;
    const from = Float64Array.from(target.names, (name) => truth[name as keyof typeof truth]);
    const chains: Record<string, Float64Array[]> = Object.fromEntries(target.names.map((name) => [name, []]));
    for (let replica = 0; replica < 4; replica += 1) {
      const state = startReplica(target, [], settings, 'one mode', replica);
      const logPrior = target.logPrior(from);
      const placed = { ...state, x: from.slice(), logPrior, logLikelihood: target.logLikelihood(from) };
      const { block } = advance(target, [], settings, placed, settings.warmup + draws);
      target.names.forEach((name, i) => {
        const every = draws / kept;
        chains[name].push(
          Float64Array.from(
            { length: kept },
            (_, k) => block.values[(2000 + k * every) * block.width + 2 + i],
          ),
        );
      });
    }
    expect(judgeGate({ chainsByParameter: chains })).toEqual({ met: true, reasons: [] });
    const reasons = judgeModes(
      found,
      modeTable(
        found,
        found.names.map((name) => chains[name]),
      ),
    );
    expect(reasons.join(' ')).toMatch(
      /The mode mu1 .*mu2 .*mu3 .*no draw.*by the independent run.*let the fit run longer/,
    );
  });

  it('is the same however it grows, and by another seed within its errors', () => {
    const grown = start();
    grown.modesAt(225);
    grown.modesAt(500);
    expect(grown.modesAt(800)).toEqual(found);
    const other = IndependentRun.of(spec, 'another', () => inference)!.modesAt(800);
    expect(other.modes.length).toBe(found.modes.length);
    other.modes.forEach(({ weight, error }, k) => {
      const { weight: own, error: ownError } = found.modes[k];
      expect(weight).not.toBe(own);
      expect(Math.abs(weight - own)).toBeLessThan(5.5 * Math.hypot(error, ownError));
    });
  });

  it('scatters from seed to seed as its errors say, also when it is short', () => {
    const runs = Array.from({ length: 12 }, (_, k) =>
      IndependentRun.of(spec, `scatter ${k}`, () => inference)!.modesAt(240),
    );
    const exact = quadratureShares(100)[0];
    const square = runs.reduce(
      (sum, { modes: [{ weight, error }] }) => sum + ((weight - exact) / error) ** 2,
      0,
    );
    // χ² with 12 degrees of freedom lies outside with a probability of 0.01.
    expect(square).toBeGreaterThan(3.07);
    expect(square).toBeLessThan(28.3);
  });

  it('says so where it is worth too few draws, and gives no value where the error is large', () => {
    const [{ mu, weight }, { mu: other }] = found.modes;
    const rng = createRng('a share');
    const picks = Array.from({ length: 4 }, () => Float64Array.from({ length: 500 }, () => rng.uniform()));
    const masses = found.names.map((_, d) =>
      picks.map((pick) => pick.map((u) => (u < weight ? mu[d] : other[d]))),
    );
    const uncertain = { ...found, modes: found.modes.map((mode) => ({ ...mode, error: 0.03 })) };
    const table = modeTable(uncertain, masses);
    expect(table.map(({ scanWeight }) => scanWeight)).toEqual([NaN, NaN]);
    expect(judgeModes(uncertain, table)).toEqual([]);
    expect(judgeModes({ ...uncertain, effective: 12 }, table).join(' ')).toMatch(
      /independent run is worth 12 draws, fewer than the 30.*let the fit run longer/,
    );
    // A share without a value still counts within its error.
    const one = found.names.map((_, d) => picks.map((pick) => pick.map(() => mu[d])));
    expect(judgeModes(uncertain, modeTable(uncertain, one)).join(' ')).toMatch(/no draw/);
  });

  it('is there for light beside heavy fields, and not where a scan is', () => {
    const of = (id: string, options: Record<string, unknown>): IndependentRun | null => {
      const axis = {
        kind: 'points' as const,
        kappa: Float64Array.from({ length: 24 }, (_, i) => 0.004 * Math.exp(0.16 * i)),
      };
      const template = compileTemplate(id, options, axis);
      const priors = Object.fromEntries(template.parameters.map((p) => [p.name, p.defaultPrior]));
      const S = template.predict(template.parameters.map((_, i) => 0.5 + i));
      const covariance = Float64Array.from({ length: 576 }, (_, k) => (k % 25 === 0 ? 0.01 : 0));
      return IndependentRun.of(
        { data: { S, covariance, mockCount: null }, likelihood: 'normal', template, priors },
        'seed',
      );
    };
    const light = of('locked-exact', { fields: ['light', 'heavy'], vertex: 2 });
    expect(light?.names).toEqual(['nu1', 'mu1']);
    const modes = light!.modesAt(100).modes;
    expect(modes.reduce((sum, { weight }) => sum + weight, 0)).toBeGreaterThan(0.9);
    expect(of('free-phase', { fields: 1 })).toBeNull();
    expect(of('free-phase', { fields: 2 })).toBeNull();
  });
});
