/**
 * Running sums of exponentials in batches, in bounded memory: ln Σ exp(value) of several quantities over stretches of equal length.
 * When all places are taken, neighbouring batches are joined and the stretches become twice as long, so that what is held is a
 * function of the values and their number alone. Plain data: a checkpoint holds it.
 */

import type { LogSums } from './types';

/** Batches that are held at most; at least half as many are, once that many are complete. */
const PLACES = 32;

/** No entry yet. */
export function emptySums(quantities: number): LogSums {
  const logs = new Float64Array(PLACES * quantities).fill(-Infinity);
  return { quantities, logs, length: 1, filled: 0, count: 0 };
}

/** ln(eᵃ + eᵇ); −∞ stands for an empty sum. */
export function addLogs(a: number, b: number): number {
  const larger = a > b ? a : b;
  if (larger === -Infinity) return larger;
  return larger + Math.log1p(Math.exp((a > b ? b : a) - larger));
}

/** Adds one entry: `values[q]` is the logarithm of what is added to quantity q. */
export function addEntry(sums: LogSums, values: ArrayLike<number>): void {
  const { quantities, logs } = sums;
  const at = sums.filled * quantities;
  for (let q = 0; q < quantities; q++) logs[at + q] = addLogs(logs[at + q], values[q]);
  sums.count++;
  if (sums.count < sums.length) return;
  sums.count = 0;
  sums.filled++;
  if (sums.filled === PLACES) joinPlaces(sums);
}

function joinPlaces(sums: LogSums): void {
  const { quantities, logs } = sums;
  joinPairs(logs, quantities, PLACES);
  logs.fill(-Infinity, (PLACES / 2) * quantities);
  sums.filled = PLACES / 2;
  sums.length *= 2;
}

/** Joins batches 2i and 2i + 1 of the first `count` (even) ones, in place. */
function joinPairs(logs: Float64Array, quantities: number, count: number): void {
  for (let batch = 0; 2 * batch < count; batch++) {
    for (let q = 0; q < quantities; q++) {
      const from = 2 * batch * quantities + q;
      logs[batch * quantities + q] = addLogs(logs[from], logs[from + quantities]);
    }
  }
}

/** ln of the mean over each complete batch, by batch, then quantity; each `joined` (a power of two) neighbours taken as one. */
export function batchMeans(sums: LogSums, joined = 1): Float64Array[] {
  const { quantities, length } = sums;
  const logs = sums.logs.slice();
  let filled = sums.filled;
  for (let factor = 1; factor < joined; factor *= 2) {
    filled -= filled % 2;
    joinPairs(logs, quantities, filled);
    filled /= 2;
  }
  const whole = Math.log(length * joined);
  return Array.from({ length: filled }, (_, batch) =>
    logs.slice(batch * quantities, (batch + 1) * quantities).map((log) => log - whole),
  );
}
