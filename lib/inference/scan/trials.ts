/** One look for a signal: its own global p, and its height on every null where the looks share them. */
export interface Look {
  globalP: number;
  heights: ArrayLike<number> | null;
}

export interface JointSignificance {
  globalP: number;
  /** Nulls that the looks share; 0 where none do. */
  nulls: number;
  method: 'none' | 'same-nulls' | 'bonferroni';
  /** Looks that could not be put on the same nulls. */
  apart: number;
}

/**
 * The probability, without a signal, that the smallest global p of several looks is as small as it is.
 *
 * Looks with heights were made on the same nulls, in the same order: each null has in every look the rank of its height, and the
 * smallest of its p is compared with the smallest that was found: (k + 1)/(n + 1). What isn't on these nulls counts as one
 * look more each, by Bonferroni's bound: m times the smallest of all, at most 1.
 */
export function jointSignificance(looks: readonly Look[]): JointSignificance | null {
  if (looks.length === 0) return null;
  const shared = looks.flatMap(({ globalP, heights }) =>
    heights && heights.length > 0 ? [{ globalP, heights }] : [],
  );
  const apart = looks.filter(({ heights }) => !heights || heights.length === 0);
  const nulls = shared.length > 0 ? Math.min(...shared.map(({ heights }) => heights.length)) : 0;
  const together = shared.length > 0 ? onSameNulls(shared, nulls) : null;
  if (apart.length === 0 && together !== null) {
    return { globalP: together, nulls, method: looks.length === 1 ? 'none' : 'same-nulls', apart: 0 };
  }
  const parts = [...apart.map(({ globalP }) => globalP), ...(together === null ? [] : [together])];
  return {
    globalP: Math.min(1, parts.length * Math.min(...parts)),
    nulls,
    method: parts.length === 1 ? 'none' : 'bonferroni',
    apart: apart.length,
  };
}

function onSameNulls(
  looks: readonly { globalP: number; heights: ArrayLike<number> }[],
  nulls: number,
): number {
  const smallest = new Float64Array(nulls).fill(1);
  for (const { heights } of looks) {
    const order = Array.from({ length: nulls }, (_, i) => i).sort((a, b) => heights[b] - heights[a]);
    let last = 0;
    for (let rank = 0; rank < nulls; rank += 1) {
      // Equal heights share the p of the last of them.
      if (rank >= last) {
        last = rank + 1;
        while (last < nulls && heights[order[last]] === heights[order[rank]]) last += 1;
      }
      smallest[order[rank]] = Math.min(smallest[order[rank]], last / nulls);
    }
  }
  const found = Math.min(...looks.map(({ globalP }) => globalP));
  let k = 0;
  for (let i = 0; i < nulls; i += 1) if (smallest[i] <= found) k += 1;
  return (k + 1) / (nulls + 1);
}
