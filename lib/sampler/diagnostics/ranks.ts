/** Order of draws by a radix sort, and normal scores of their ranks: the costly part of the rank-based diagnostics. */
import { normalQuantile } from '../special-functions';

const DIGIT_BITS = 11;
const BUCKETS = 1 << DIGIT_BITS;

/** The indices of the values from the smallest to the largest; values finite, equal ones in the order they came. */
export function ascendingOrder(values: Float64Array): Uint32Array {
  const size = values.length;
  const low = new Uint32Array(size);
  const high = new Uint32Array(size);
  const bits = new Uint32Array(new Float64Array(1).buffer);
  const number = new Float64Array(bits.buffer);
  for (let i = 0; i < size; i++) {
    // −0 and 0 are one value; a sum with 0 gives both the same bits.
    number[0] = values[i] + 0;
    // As unsigned integers, bits of positive numbers sort upwards and those of negative ones downwards.
    const negative = bits[1] >>> 31 === 1;
    low[i] = negative ? ~bits[0] : bits[0];
    high[i] = negative ? ~bits[1] : bits[1] ^ 0x80000000;
  }
  let order = new Uint32Array(size);
  for (let i = 0; i < size; i++) order[i] = i;
  let sorted = new Uint32Array(size);
  const counts = new Uint32Array(BUCKETS);
  for (const word of [low, high]) {
    for (let shift = 0; shift < 32; shift += DIGIT_BITS) {
      counts.fill(0);
      for (let i = 0; i < size; i++) counts[(word[i] >>> shift) & (BUCKETS - 1)]++;
      let start = 0;
      for (let bucket = 0; bucket < BUCKETS; bucket++) {
        const count = counts[bucket];
        counts[bucket] = start;
        start += count;
      }
      for (let i = 0; i < size; i++) {
        const index = order[i];
        sorted[counts[(word[index] >>> shift) & (BUCKETS - 1)]++] = index;
      }
      [order, sorted] = [sorted, order];
    }
  }
  return order;
}

/**
 * The order of the distances |x − centre| of values whose own order is known: walking outwards from the centre
 * merges the two sides in linear time.
 */
export function orderOfDistances(
  distances: Float64Array,
  sorted: Float64Array,
  order: Uint32Array,
  centre: number,
) {
  const size = order.length;
  const result = new Uint32Array(size);
  let right = 0;
  while (right < size && sorted[right] < centre) right++;
  let left = right - 1;
  for (let at = 0; at < size; at++) {
    const takeLeft = right >= size || (left >= 0 && distances[order[left]] <= distances[order[right]]);
    result[at] = takeLeft ? order[left--] : order[right++];
  }
  return result;
}

/** The normal scores Φ⁻¹((r − 3/8)/(S + 1/4)) of the ranks r = 1 … S (Blom 1958). */
export function normalScores(size: number): Float64Array {
  const scores = new Float64Array(size);
  for (let i = 0; i < size / 2; i++) {
    scores[i] = normalQuantile((i + 0.625) / (size + 0.25));
    scores[size - 1 - i] = -scores[i];
  }
  return scores;
}

/** Each value replaced by the normal score of its rank, ties at their average rank; `order` as of ascendingOrder. */
export function rankScores(values: Float64Array, order: Uint32Array, scores: Float64Array): Float64Array {
  const size = values.length;
  const result = new Float64Array(size);
  for (let start = 0; start < size;) {
    const value = values[order[start]];
    let end = start + 1;
    while (end < size && values[order[end]] === value) end++;
    const rank = (start + 1 + end) / 2;
    const score = end === start + 1 ? scores[start] : normalQuantile((rank - 0.375) / (size + 0.25));
    for (let i = start; i < end; i++) result[order[i]] = score;
    start = end;
  }
  return result;
}
