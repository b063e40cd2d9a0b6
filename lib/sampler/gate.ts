/**
 * The convergence gate: rank-normalised split R-hat below, bulk and tail effective sample size above a bound, for every
 * reported quantity, judged only after enough draws. Bounds: Vehtari, Gelman, Simpson, Carpenter, Bürkner (2021), Bayesian Analysis 16, 667.
 *
 * R-hat can't see a mode that no replica visited: a met gate is necessary, not sufficient.
 */
import { diagnose } from './diagnostics';
import type { Diagnosis } from './diagnostics';

/** What every quantity must reach. */
export interface GateTarget {
  /** R-hat must be below this (greater than 1). */
  rhat: number;
  /** Bulk and tail effective sample size, all replicas together, must be above this. */
  ess: number;
}

export const DEFAULT_GATE: Readonly<GateTarget> = { rhat: 1.01, ess: 400 };

/** Kept draws a replica before which nothing is judged: early agreement can be chance. */
export const DEFAULT_MIN_DRAWS = 1000;

/** What is judged. A quantity whose diagnosis is known already isn't computed again. */
export interface GateEvidence {
  /** For each reported quantity the kept draws of each replica. */
  chainsByParameter: Readonly<Record<string, readonly Float64Array[]>>;
  diagnosisByParameter?: Readonly<Record<string, Diagnosis>>;
}

export interface GateVerdict {
  met: boolean;
  /** One sentence for each thing that is missing: quantity, value, bound and remedy. Empty where the gate is met. */
  reasons: string[];
}

/** Judges whether every quantity has converged. A value that is NaN is never taken as met; nothing to judge isn't either. */
export function judgeGate(
  evidence: GateEvidence,
  target: GateTarget = DEFAULT_GATE,
  minDraws: number = DEFAULT_MIN_DRAWS,
): GateVerdict {
  const names = Object.keys(evidence.chainsByParameter);
  if (names.length === 0) return { met: false, reasons: ['There is no quantity to judge yet.'] };
  const draws = Math.min(
    ...names.map((name) => Math.min(Infinity, ...evidence.chainsByParameter[name].map((c) => c.length))),
  );
  const kept = Number.isFinite(draws) ? draws : 0;
  if (kept < minDraws) {
    const sentence = `Each replica has ${kept} kept draws, fewer than the ${minDraws} before which convergence isn’t judged: let the fit run on.`;
    return { met: false, reasons: [sentence] };
  }
  const reasons = names.flatMap((name) => {
    const known = evidence.diagnosisByParameter?.[name];
    return shortcomings(name, known ?? diagnose(evidence.chainsByParameter[name]), target);
  });
  return { met: reasons.length === 0, reasons };
}

function shortcomings(name: string, found: Diagnosis, target: GateTarget): string[] {
  if (found.nonFinite) {
    const { count, chain, draw } = found.nonFinite;
    return [
      `${name} has ${count} ${count === 1 ? 'draw that isn’t' : 'draws that aren’t'} finite (first in replica ${chain}, draw ${draw}), so that nothing can be said of it: correct its definition.`,
    ];
  }
  if (found.constant) {
    return [
      `${name} is ${found.mean} in every draw, so that its convergence has no value: fix it by its prior, or look why no move is accepted.`,
    ];
  }
  const reasons: string[] = [];
  if (!(found.rhat < target.rhat)) {
    reasons.push(
      `R-hat of ${name} is ${shown(found.rhat, 4)}, not below ${target.rhat}: the replicas don’t agree yet; ` +
        'let the fit run longer, and look at its traces and modes.',
    );
  }
  const sizes = [
    ['bulk', found.essBulk],
    ['tail', found.essTail],
  ] as const;
  for (const [part, size] of sizes) {
    if (size > target.ess) continue;
    reasons.push(
      `The ${part} effective sample size of ${name} is ${shown(size, 0)}, not above ${target.ess}: ${remedy(size, target.ess)}.`,
    );
  }
  return reasons;
}

function remedy(size: number, wanted: number): string {
  if (!(size > 0)) return 'let the fit run longer, or look why the quantity hardly moves';
  const factor = Math.max(1.1, wanted / size);
  return `about ${factor.toFixed(1)} times as many draws are needed`;
}

function shown(value: number, digits: number): string {
  return Number.isNaN(value) ? 'undefined' : value.toFixed(digits);
}
