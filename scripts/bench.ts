import { spawnSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { cpus } from 'node:os';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { diagnose } from '@/lib/sampler';
import { costAgainstBins } from './bench/bins';
import { runP1, type P1Result } from './bench/p1';

/**
 * `npm run bench -- [--json FILE] [--draws N] [--baseline-steps N]`: how much posterior a CPU second buys, as ratios within one run on
 * one machine. The comparison is made where Python with emcee is installed; where not, that is said.
 */

const { values } = parseArgs({
  options: {
    json: { type: 'string' },
    draws: { type: 'string', default: '40000' },
    'baseline-steps': { type: 'string', default: '20000' },
    runs: { type: 'string', default: '5' },
  },
});

interface Baseline {
  cpuSeconds: number;
  essWorstPerCpuSecond: number;
  evaluationsPerCpuSecond: number;
  mean: number[];
  sd: number[];
}

/** One run of the ensemble sampler; null where there is no Python with emcee. */
function runBaseline(steps: number, seed: number): Baseline | null {
  const script = fileURLToPath(new URL('./bench/baseline.py', import.meta.url));
  const posterior = fileURLToPath(new URL('../tests/published/data/posteriors/p1.json', import.meta.url));
  for (const python of ['/usr/bin/python3', 'python3']) {
    const run = spawnSync(python, [script, posterior, String(steps), String(seed)], {
      encoding: 'utf8',
      env: { ...process.env, OPENBLAS_NUM_THREADS: '1' },
      maxBuffer: 2 ** 30,
    });
    if (run.status !== 0) continue;
    const found = JSON.parse(run.stdout) as Omit<Baseline, 'essWorstPerCpuSecond'> & {
      chains: number[][][];
      share: number;
    };
    // The same function for both samplers; every fourth walker stands for four.
    const sizes = found.chains.flatMap((chains) => {
      const { essBulk, essTail } = diagnose(chains.map((chain) => Float64Array.from(chain)));
      return [essBulk, essTail];
    });
    const { cpuSeconds, evaluationsPerCpuSecond, mean, sd, share } = found;
    return {
      cpuSeconds,
      evaluationsPerCpuSecond,
      mean,
      sd,
      essWorstPerCpuSecond: Math.min(...sizes) / share / cpuSeconds,
    };
  }
  return null;
}

function row(what: string, value: string): void {
  process.stdout.write(`  ${what.padEnd(64)} ${value}\n`);
}

const whole = (value: number): string => Math.round(value).toLocaleString('en-GB');

function showP1(p1: P1Result, baselines: Baseline[]): void {
  process.stdout.write(
    `\nP1: two fields, 8 parameters, 40 bins, ${p1.replicas} × ${whole(p1.drawsPerReplica)} draws\n`,
  );
  row('effective draws of the worst parameter a CPU second', whole(p1.essWorstPerCpuSecond));
  row('  tables, warm-up, chains and ladders; CPU seconds', p1.cpuSeconds.toFixed(2));
  row('  diagnostics at the end, counted on neither side', p1.cpuSecondsOfDiagnostics.toFixed(2));
  row(
    'worst mean, in errors of the comparison with the reference',
    `${p1.worstMeanInErrors.toFixed(2)} (right below 4)`,
  );
  row('jumps accepted', p1.jumpAcceptance.toFixed(2));
  const { logEvidence, logEvidenceReference, cpuSecondsToMeansAndEvidence: soon } = p1;
  row(
    'ln Z, and the reference’s',
    logEvidence
      ? `${logEvidence.value.toFixed(3)} ± ${logEvidence.error.toFixed(3)}, ${logEvidenceReference.toFixed(3)}`
      : 'no value yet',
  );
  row(
    'CPU seconds until means are within 0.05 sd, ln Z within 0.1',
    soon === null ? 'not reached' : soon.toFixed(2),
  );
  row('likelihood evaluations a CPU second', whole(p1.evaluationsPerCpuSecond));
  if (baselines.length === 0 && Number(values.runs) === 0) return;
  if (baselines.length === 0) {
    process.stdout.write(
      '  No comparison: Python 3 with emcee (Debian: python3-emcee) is not installed here.\n',
    );
    return;
  }
  const best = Math.max(...baselines.map((run) => run.essWorstPerCpuSecond));
  row(`ensemble sampler, highest of ${baselines.length} runs started at the truth`, whole(best));
  row(
    'ratio',
    `${(p1.essWorstPerCpuSecond / best).toFixed(0)}${p1.momentsRight ? '' : ', not counted: moments are off'}`,
  );
}

const p1 = runP1(Number(values.draws), 'benchmark');
const baselines: Baseline[] = [];
for (let seed = 1; seed <= Number(values.runs); seed += 1) {
  const run = runBaseline(Number(values['baseline-steps']), seed);
  if (!run) break;
  baselines.push(run);
}
const bins = costAgainstBins();
const { version } = JSON.parse(
  readFileSync(fileURLToPath(new URL('../package.json', import.meta.url)), 'utf8'),
) as { version: string };
const machine = `${cpus().length} × ${cpus()[0].model}, Node.js ${process.version}, Beatnote ${version}`;
process.stdout.write(`${machine}\n`);
showP1(p1, baselines);
process.stdout.write('\nOne evaluation against the number of bins, CPU microseconds\n');
for (const { bins: n, covariance, microseconds } of bins)
  row(`${n} bins, ${covariance} covariance`, microseconds.toFixed(2));
if (values.json) {
  writeFileSync(values.json, `${JSON.stringify({ machine, p1, baseline: baselines, bins }, null, 2)}\n`);
}
