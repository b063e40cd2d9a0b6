import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { buildInference, type Inference } from '@/lib/inference';
import { advance, createRng, diagnose, evidenceOf, startReplica, stonesOf } from '@/lib/sampler';
import type { ReplicaState } from '@/lib/sampler';
import { warmupDraws } from '@/lib/services/fit-schedule';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { compileTemplate, type Prior } from '@/lib/templates';

/**
 * The benchmark posterior P1: two fields with amplitude and phase, 8 parameters, 40 bins with a full covariance. Its reference
 * (means, errors, ln Z) is derived by us by importance sampling; the file says how.
 */

interface ReferenceFile {
  kappa: number[];
  S: number[];
  covariance: number[][];
  reference: {
    logZ: number;
    logZ_error: number;
    parameters: Record<string, { mean: number; mean_error: number; sd: number }>;
  };
}

const file = fileURLToPath(new URL('../../tests/published/data/posteriors/p1.json', import.meta.url));
const p1 = JSON.parse(readFileSync(file, 'utf8')) as ReferenceFile;

const uniform = (lo: number, hi: number): Prior => ({ kind: 'uniform', lo, hi });

/** P1 as `buildInference` makes it. */
export function buildP1(): Inference {
  return buildInference({
    data: {
      S: Float64Array.from(p1.S),
      covariance: Float64Array.from(p1.covariance.flat()),
      mockCount: null,
    },
    likelihood: 'normal',
    template: compileTemplate(
      'free-phase',
      { fields: 2, amplitudes: 'amplitude-phase', background: [1, 2] },
      { kind: 'points', kappa: Float64Array.from(p1.kappa) },
    ),
    priors: {
      mu1: uniform(0.3, 8),
      mu2: uniform(0.3, 8),
      A1: uniform(0, 3),
      A2: uniform(0, 3),
      phi1: uniform(-Math.PI, Math.PI),
      phi2: uniform(-Math.PI, Math.PI),
      c1: uniform(-3, 3),
      c2: uniform(-3, 3),
    },
  });
}

/** CPU seconds of this process so far, user and system. */
export function cpuSeconds(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

export interface P1Result {
  replicas: number;
  drawsPerReplica: number;
  /** Tables, start, warm-up, chains and ladders. */
  cpuSeconds: number;
  /** Effective sizes and their like at the end, which the comparison doesn't count on either side. */
  cpuSecondsOfDiagnostics: number;
  essWorst: number;
  essWorstPerCpuSecond: number;
  evaluationsPerCpuSecond: number;
  /** Worst |mean − reference| in √(MCSE² + error²); the size counts only below 4. */
  worstMeanInErrors: number;
  momentsRight: boolean;
  /** CPU seconds until every mean was within 0.05 sd of the reference and ln Z within 0.1, both for good. */
  cpuSecondsToMeansAndEvidence: number | null;
  logEvidence: { value: number; error: number } | null;
  logEvidenceReference: number;
  jumpAcceptance: number;
  mean: Record<string, number>;
  sd: Record<string, number>;
}

const REPLICAS = 4;
/** Draws between two looks at means and evidence. */
const LOOK = 2000;

/**
 * Samples P1 with a new fit's own settings, from tables and warm-up to the last draw, started over the prior, in this process
 * alone. The effective size is the least of bulk and tail over all parameters.
 */
export function runP1(draws: number, seed: string): P1Result {
  const begun = cpuSeconds();
  const inference = buildP1();
  const { target, jumps, blocks } = inference;
  const settings = samplerSettings({ warmup: warmupDraws, sampler: samplerOfNewFits }, blocks);
  const { names } = target;
  const chains = names.map(() => Array.from({ length: REPLICAS }, () => new Float64Array(draws)));
  let states: ReplicaState[] = Array.from({ length: REPLICAS }, (_, replica) =>
    startReplica(target, jumps, settings, seed, replica),
  );
  states = states.map((state) => advance(target, jumps, settings, state, warmupDraws).state);
  const { parameters, logZ } = p1.reference;
  let sampling = 0;
  let right: number | null = null;
  let from = cpuSeconds();
  sampling += from - begun;
  for (let made = 0; made < draws;) {
    const count = Math.min(LOOK, draws - made);
    states = states.map((state, replica) => {
      const step = advance(target, jumps, settings, state, count);
      const { values, width } = step.block;
      for (let k = 0; k < count; k += 1) {
        for (let i = 0; i < names.length; i += 1) chains[i][replica][made + k] = values[k * width + 2 + i];
      }
      return step.state;
    });
    made += count;
    sampling += cpuSeconds() - from;
    // Looking costs nothing of what is measured.
    const near = names.every((name, i) => {
      const { mean, sd } = parameters[name];
      const sum = chains[i].reduce((total, chain) => {
        for (let k = 0; k < made; k += 1) total += chain[k];
        return total;
      }, 0);
      return Math.abs(sum / (REPLICAS * made) - mean) < 0.05 * sd;
    });
    const evidence = evidenceOfStates(states);
    const good = near && evidence !== null && Math.abs(evidence.value - logZ) < 0.1;
    right = good ? (right ?? sampling) : null;
    from = cpuSeconds();
  }
  from = cpuSeconds();
  const diagnoses = names.map((_, i) => diagnose(chains[i]));
  const diagnosing = cpuSeconds() - from;
  const essWorst = Math.min(...diagnoses.flatMap(({ essBulk, essTail }) => [essBulk, essTail]));
  const worst = Math.max(
    ...names.map((name, i) => {
      const { mean, mean_error: error } = parameters[name];
      return Math.abs(diagnoses[i].mean - mean) / Math.hypot(diagnoses[i].mcseMean, error);
    }),
  );
  const jump = states.map(({ moves }) => moves[0].accepted / moves[0].proposed);
  const evidence = evidenceOfStates(states);
  return {
    replicas: REPLICAS,
    drawsPerReplica: draws,
    cpuSeconds: sampling,
    cpuSecondsOfDiagnostics: diagnosing,
    essWorst,
    essWorstPerCpuSecond: essWorst / sampling,
    evaluationsPerCpuSecond: evaluationRate(inference),
    worstMeanInErrors: worst,
    momentsRight: worst < 4,
    cpuSecondsToMeansAndEvidence: right,
    logEvidence: evidence,
    logEvidenceReference: logZ,
    jumpAcceptance: jump.reduce((sum, share) => sum + share, 0) / REPLICAS,
    mean: Object.fromEntries(names.map((name, i) => [name, diagnoses[i].mean])),
    sd: Object.fromEntries(names.map((name, i) => [name, diagnoses[i].sd])),
  };
}

function evidenceOfStates(states: readonly ReplicaState[]): { value: number; error: number } | null {
  const stones = states.flatMap((state) => stonesOf(state) ?? []);
  if (stones.length < states.length) return null;
  const found = evidenceOf(stones);
  return 'value' in found ? { value: found.value, error: found.error } : null;
}

/** Likelihood evaluations a CPU second with every parameter moved, both masses included. */
export function evaluationRate({ target }: Pick<Inference, 'target'>, evaluations = 100_000): number {
  const rng = createRng('evaluation rate');
  const points = Array.from({ length: 1000 }, () => {
    const x = new Float64Array(target.names.length);
    target.drawPrior(rng, x);
    return x;
  });
  // One round first, so that compilation isn't counted.
  for (const x of points) target.logLikelihood(x);
  const begun = cpuSeconds();
  for (let k = 0; k < evaluations; k += 1) target.logLikelihood(points[k % points.length]);
  return evaluations / (cpuSeconds() - begun);
}
