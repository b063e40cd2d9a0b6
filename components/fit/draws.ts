import type { DrawsHead } from '@/lib/schemas';

/** Draws for figures, warm-up included and marked, as the API gives them in either format. */
export interface FigureDraws {
  replicas: number;
  /** Step between the draws given, in recorded draws. */
  stride: number;
  /** Of each row: its replica, its recorded draw, whether it is of warm-up (1). */
  replica: ArrayLike<number>;
  draw: ArrayLike<number>;
  warmup: ArrayLike<number>;
  logLikelihood: ArrayLike<number>;
  columns: Readonly<Record<string, ArrayLike<number>>>;
}

/** Reads packed draws (`format=float32`) where they lie; throws where the bytes aren't what their head says. */
export function unpackDraws(packed: ArrayBuffer): FigureDraws {
  const headBytes = packed.byteLength >= 4 ? new DataView(packed).getUint32(0, true) : 0;
  const head = JSON.parse(
    new TextDecoder().decode(new Uint8Array(packed, 4, Math.min(headBytes, packed.byteLength - 4))),
  ) as DrawsHead;
  const { rows, columns } = head;
  const count = rows.reduce((sum, each) => sum + each, 0);
  const start = 4 + headBytes;
  if (packed.byteLength !== start + 4 * count * (2 + columns.length))
    throw new Error(`The draws have ${packed.byteLength} bytes, which isn't what their head says.`);
  // Every machine that runs a browser today is little-endian, so the numbers are used where they lie.
  const draw = new Uint32Array(packed, start, count);
  const column = (i: number) => new Float32Array(packed, start + 4 * count * (1 + i), count);
  const replica = new Uint8Array(count);
  let from = 0;
  rows.forEach((each, r) => {
    replica.fill(r, from, from + each);
    from += each;
  });
  return {
    replicas: head.replicas,
    stride: head.stride,
    replica,
    draw,
    warmup: Uint8Array.from(draw, (each) => (each < head.warmup ? 1 : 0)),
    logLikelihood: column(0),
    columns: Object.fromEntries(columns.map((name, i) => [name, column(1 + i)])),
  };
}

/** Values of one column by replica, warm-up included, in the order of the draws. */
export function byReplica(draws: FigureDraws, name: string): number[][] {
  const values = draws.columns[name] ?? [];
  const replicas = Array.from({ length: draws.replicas }, () => [] as number[]);
  for (let i = 0; i < values.length; i++) replicas[draws.replica[i]]?.push(values[i]);
  return replicas;
}

/** Positions of the kept draws. */
export function keptIndices({ warmup }: Pick<FigureDraws, 'warmup'>): number[] {
  const kept: number[] = [];
  for (let i = 0; i < warmup.length; i++) if (warmup[i] === 0) kept.push(i);
  return kept;
}

/** Values of one column over the kept draws of all replicas. */
export function keptColumn(draws: FigureDraws, name: string): Float64Array {
  const values = draws.columns[name] ?? [];
  return Float64Array.from(keptIndices(draws), (i) => values[i] ?? NaN);
}

/** Position of the kept draw with the highest likelihood; −1 without a kept draw. */
export function bestIndex({ warmup, logLikelihood }: Pick<FigureDraws, 'warmup' | 'logLikelihood'>): number {
  let best = -1;
  for (let i = 0; i < warmup.length; i++)
    if (warmup[i] === 0 && (best < 0 || logLikelihood[i] > logLikelihood[best])) best = i;
  return best;
}

/** Parameters of one draw by name, fixed ones filled in. */
export function drawValues(
  draws: FigureDraws,
  index: number,
  fixed: Readonly<Record<string, number>>,
): Record<string, number> {
  const drawn = Object.entries(draws.columns).map(([name, values]) => [name, values[index]] as const);
  return { ...fixed, ...Object.fromEntries(drawn) };
}

/** At most `count` of the kept draws, evenly spread. */
export function someKept(draws: FigureDraws, count: number): number[] {
  const kept = keptIndices(draws);
  if (kept.length <= count) return kept;
  return Array.from({ length: count }, (_, k) => kept[Math.floor((k * kept.length) / count)]);
}
