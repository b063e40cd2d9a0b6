/**
 * Log evidence from ratios of neighbouring distributions, in log space.
 *
 * Stepping stone (Xie, Lewis, Fan, Kuo, Chen 2011, Systematic Biology 60, 150, https://doi.org/10.1093/sysbio/syq085) writes ln Z as a sum of
 * ln(Z_{k+1}/Z_k) over the rungs of a ladder. Each ratio is taken from both of its ends, by the geometric bridge of Meng and Wong
 * (1996, Statistica Sinica 6, 831):
 *
 *     Z_{k+1}/Z_k = E_k[√(f_{k+1}/f_k)] / E_{k+1}[√(f_k/f_{k+1})]
 *
 * whose variance is finite whenever the supports agree, and smaller than that of one end alone. With a proposal whose normalised
 * density is known in place of the prior, one stone suffices: generalised stepping stone (Fan, Wu, Chen, Kuo, Lewis 2011,
 * Molecular Biology and Evolution 28, 523).
 *
 * Error. Each replica's time is cut into batches; leaving one out at a time gives pseudo-values (jackknife, Miller 1974, Biometrika 61, 1), which
 * also take the first-order bias off. Batches are joined until neighbours no longer resemble each other beyond chance.
 */
import { batchMeans } from './log-sums';
import { betaProbability } from './special-functions';
import type { LogSums, ReplicaState } from './types';

/** ln Z with its standard error and the error's degrees of freedom. */
export interface Evidence {
  value: number;
  error: number;
  dof: number;
}

/** Why there is no value, as a sentence that can follow "because". */
export interface NoEvidence {
  because: string;
}

/** Degrees of freedom below which an error is no error. */
export const LEAST_DOF = 15;
/** Lag-1 correlation of batches that can't be joined any more above which there is no error to speak of, beside two sds of noise. */
const LIKENESS = 0.2;
/** Replicas whose difference would be this rare by chance don't agree. */
const DISAGREEMENT = 1e-3;
/** From here on the error is at least that of the replicas’ own scatter. */
const DOUBT = 0.05;

/** A replica's sums for the evidence: from its jumps, or from its ladder; null during warm-up and where it has neither. */
export function stonesOf({ stones, ladder }: ReplicaState): LogSums | null {
  return stones ?? ladder?.stones ?? null;
}

/**
 * ln Z = Σ_q ± ln mean(q) over each replica's sums, averaged over replicas: quantities 0, 2, 4 … count positively (ends seen from
 * below), 1, 3, 5 … negatively. Needs at least two replicas.
 */
export function evidenceOf(replicas: readonly LogSums[]): Evidence | NoEvidence {
  if (replicas.length < 2) return { because: 'one replica alone can’t say how far it is off' };
  let joined = 1;
  let found = pseudoValues(replicas, joined);
  const batches = (each: Float64Array[]) => each.reduce((sum, { length }) => sum + length, 0);
  if (found.some(({ length }) => length < 2) || batches(found) - 1 < LEAST_DOF) {
    return { because: `its error has fewer than ${LEAST_DOF} degrees of freedom yet: let the fit run on` };
  }
  if (found.some((values) => values.some((value) => !Number.isFinite(value)))) {
    return { because: 'neighbouring rungs of the ladder hardly overlap yet: let the fit run on' };
  }
  let alike = likeness(found);
  while (alike > 1.5 / Math.sqrt(batches(found))) {
    joined *= 2;
    const next = pseudoValues(replicas, joined);
    if (batches(next) - 1 < LEAST_DOF || next.some(({ length }) => length < 2)) break;
    found = next;
    alike = likeness(found);
  }
  if (alike > LIKENESS + 2 / Math.sqrt(batches(found))) {
    return { because: 'its draws resemble each other over too long a time: let the fit run on' };
  }
  const evidence = combine(found);
  // What likeness is left makes the mean of batches scatter more, by 1 + 2 × correlation in variance.
  return 'value' in evidence
    ? { ...evidence, error: evidence.error * Math.sqrt(1 + 2 * Math.max(0, alike)) }
    : evidence;
}

function combine(found: readonly Float64Array[]): Evidence | NoEvidence {
  const count = found.length;
  const means = found.map(mean);
  const value = mean(Float64Array.from(means));
  let within = 0;
  let total = 0;
  let inner = 0;
  found.forEach((values, r) => {
    const { length } = values;
    within += squaresAbout(values, means[r]) / (length * (length - 1));
    total += squaresAbout(values, value) / (length * (length - 1));
    inner += length - 1;
  });
  const between = squaresAbout(Float64Array.from(means), value) / (count - 1);
  const chance = upperF(between / (within / count), count - 1, inner);
  if (chance < DISAGREEMENT) {
    return { because: 'the replicas don’t agree on it: let the fit run on, and look at its modes' };
  }
  // Replicas that differ more than their batches tell of slowness that no batch is long enough to show.
  const square = Math.max(total / count, chance < DOUBT ? between : 0) / count;
  return { value, error: Math.sqrt(square), dof: inner + count - 1 };
}

/** Probability that F with (a, b) degrees of freedom is above `value`. */
function upperF(value: number, a: number, b: number): number {
  if (!(value > 0)) return 1;
  return betaProbability(b / (b + a * value), b / 2, a / 2);
}

/** Pseudo-values of ln Z, one a batch, for each replica. */
function pseudoValues(replicas: readonly LogSums[], joined: number): Float64Array[] {
  return replicas.map((sums) => {
    const batches = batchMeans(sums, joined);
    const count = batches.length;
    const values = new Float64Array(count);
    for (let q = 0; q < sums.quantities; q++) {
      const sign = q % 2 === 0 ? 1 : -1;
      const top = batches.reduce((most, batch) => Math.max(most, batch[q]), -Infinity);
      const parts = batches.map((batch) => Math.exp(batch[q] - top));
      const sum = parts.reduce((all, part) => all + part, 0);
      parts.forEach((part, b) => {
        const whole = Math.log(sum / count) + top;
        const without = Math.log((sum - part) / (count - 1)) + top;
        values[b] += sign * (count * whole - (count - 1) * without);
      });
    }
    return values;
  });
}

/** Lag-1 correlation of the pseudo-values within replicas, freed of its bias of about −1/batches. */
function likeness(found: readonly Float64Array[]): number {
  let products = 0;
  let squares = 0;
  let batches = 0;
  for (const values of found) {
    const own = mean(values);
    for (let b = 1; b < values.length; b++) products += (values[b] - own) * (values[b - 1] - own);
    squares += squaresAbout(values, own);
    batches += values.length;
  }
  return squares > 0 ? products / squares + found.length / batches : 0;
}

function mean(values: Float64Array): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

function squaresAbout(values: Float64Array, centre: number): number {
  return values.reduce((sum, value) => sum + (value - centre) ** 2, 0);
}
