import type { Draws } from '@/lib/schemas';

/** Values of one column by replica, warm-up included, in the order of the draws. */
export function byReplica(draws: Draws, name: string): number[][] {
  const values = draws.columns[name] ?? [];
  const replicas = Array.from({ length: draws.replicas }, () => [] as number[]);
  values.forEach((value, i) => replicas[draws.replica[i]]?.push(value));
  return replicas;
}

/** Positions of the kept draws. */
export function keptIndices({ warmup }: Pick<Draws, 'warmup'>): number[] {
  return warmup.flatMap((flag, i) => (flag === 0 ? [i] : []));
}

/** Values of one column over the kept draws of all replicas. */
export function keptColumn(draws: Draws, name: string): Float64Array {
  const values = draws.columns[name] ?? [];
  return Float64Array.from(keptIndices(draws), (i) => values[i] ?? NaN);
}

/** Position of the kept draw with the highest likelihood; −1 without a kept draw. */
export function bestIndex(draws: Draws): number {
  let best = -1;
  for (const i of keptIndices(draws)) {
    if (best < 0 || draws.logLikelihood[i] > draws.logLikelihood[best]) best = i;
  }
  return best;
}

/** Parameters of one draw by name, fixed ones filled in. */
export function drawValues(
  draws: Draws,
  index: number,
  fixed: Readonly<Record<string, number>>,
): Record<string, number> {
  const drawn = Object.entries(draws.columns).map(([name, values]) => [name, values[index]] as const);
  return { ...fixed, ...Object.fromEntries(drawn) };
}

/** At most `count` of the kept draws, evenly spread. */
export function someKept(draws: Draws, count: number): number[] {
  const kept = keptIndices(draws);
  if (kept.length <= count) return kept;
  return Array.from({ length: count }, (_, k) => kept[Math.floor((k * kept.length) / count)]);
}
