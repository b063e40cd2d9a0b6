import { execFileSync } from 'node:child_process';
import { mkdirSync, writeFileSync } from 'node:fs';
import { cpus } from 'node:os';
import path from 'node:path';
import { it } from 'vitest';

/** What a proof gets: how much to do, the seed, and where its figures go. */
export interface Trial {
  /** The full size under `npm run prove`, the smaller one in `npm test`. */
  size: number;
  /** The full size in either case, for bounds that widen as √(full/size). */
  full: number;
  seed: number;
  /** Keeps figures for docs/proof/NAME.json; call it before the expectations, so that a failure has its figures too. */
  record(figures: Record<string, unknown>): void;
}

export interface ProofSettings {
  /** Kebab-case: the file is docs/proof/NAME.json, the command `npm run prove -- NAME`. */
  name: string;
  /** What is shown, as a sentence. */
  claim: string;
  /** What `size` counts, in words ("posterior draws a replica", "simulated nulls"). */
  unit: string;
  gate: number;
  full: number;
  seed: number;
  /** Milliseconds that the full size may take. */
  timeout?: number;
}

const proving = process.env.BEATNOTE_PROVE !== undefined;

function git(...args: string[]): string {
  return execFileSync('git', args, { encoding: 'utf8' }).trim();
}

/**
 * A statistical proof as a test: at the size that `npm test` can afford, or at full size under `npm run prove`, which
 * also writes docs/proof/NAME.json. A proof widens its own bounds by the error of the smaller sample.
 */
export function proof(settings: ProofSettings, check: (trial: Trial) => void | Promise<void>): void {
  const size = proving ? settings.full : settings.gate;
  const timeout = proving ? (settings.timeout ?? 3_600_000) : 600_000;
  it(`proof ${settings.name}: ${settings.claim}`, { timeout }, async () => {
    let figures: Record<string, unknown> = {};
    const begun = performance.now();
    const finish = (verdict: 'passed' | 'failed') => {
      if (proving) write(settings, { figures, verdict, seconds: (performance.now() - begun) / 1000 });
    };
    try {
      await check({
        size,
        full: settings.full,
        seed: settings.seed,
        record: (found) => (figures = { ...figures, ...found }),
      });
    } catch (error) {
      finish('failed');
      throw error;
    }
    finish('passed');
  });
}

function write(
  settings: ProofSettings,
  outcome: { figures: Record<string, unknown>; verdict: string; seconds: number },
): void {
  const folder = path.join(process.cwd(), 'docs', 'proof');
  mkdirSync(folder, { recursive: true });
  const report = {
    name: settings.name,
    claim: settings.claim,
    verdict: outcome.verdict,
    commit: git('rev-parse', 'HEAD'),
    changedSinceCommit: git('status', '--porcelain', '--', 'lib', 'tests', 'worker') !== '',
    seed: settings.seed,
    size: settings.full,
    unit: settings.unit,
    seconds: Number(outcome.seconds.toPrecision(3)),
    machine: `${cpus().length} × ${cpus()[0].model}, Node.js ${process.version}`,
    figures: outcome.figures,
  };
  writeFileSync(path.join(folder, `${settings.name}.json`), `${JSON.stringify(report, null, 2)}\n`);
}
