import type { Draws, DrawsHead } from '@/lib/schemas';
import type { Access } from './access';
import { fitBlocks, servedRows } from './fit-draws';
import { fitColumns, fitModel, specOf } from './fit-model';
import { findDraws } from './fit-records';
import { strideOf } from './fit-schedule';

/** Draws thinned evenly for figures: replica after replica, in order. */
interface ThinnedDraws {
  head: DrawsHead;
  /** Recorded draw of each row, counted from 0 at the start of warm-up. */
  draw: number[];
  logLikelihood: number[];
  /** One array a column of the head, in its order. */
  values: number[][];
}

async function thinnedDraws(access: Access, max: number): Promise<ThinnedDraws> {
  const source = await findDraws(access);
  const { fit, snapshot, version } = source;
  const { warmup, replicas } = snapshot;
  const columns = fitColumns(specOf(fitModel(version, snapshot)));
  const stored = strideOf(fit.draws - warmup);
  const ofWarmup = Math.min(fit.draws, warmup);
  const kept = Math.max(0, fit.draws - warmup);
  const countAt = (stride: number) => Math.ceil(ofWarmup / stride) + Math.ceil(kept / stride);
  let stride = stored;
  while (replicas * countAt(stride) > max && stride < fit.draws) stride += stored;

  const names = [...columns.sampled, ...columns.derived];
  const made: ThinnedDraws = {
    head: { replicas, stride, warmup, rows: Array.from({ length: replicas }, () => 0), columns: names },
    draw: [],
    logLikelihood: [],
    values: names.map(() => []),
  };
  const derived = new Float64Array(columns.derived.length);
  for (let replica = 0; replica < replicas; replica++) {
    for await (const block of fitBlocks(fit.id, replica, fit.draws)) {
      for (const { draw, row } of servedRows(block, { warmup, draws: fit.draws })) {
        if ((draw < warmup ? draw : draw - warmup) % stride !== 0) continue;
        const offset = row * block.width;
        columns.derive(block.values, offset, derived);
        made.head.rows[replica] += 1;
        made.draw.push(draw);
        made.logLikelihood.push(block.values[offset]);
        columns.sampled.forEach((_, i) => made.values[i].push(block.values[offset + 2 + i]));
        derived.forEach((value, i) => made.values[columns.sampled.length + i].push(value));
      }
    }
  }
  return made;
}

/** Seven digits are more than a figure can show. */
const shown = (value: number): number => Number(value.toPrecision(7));

/** Draws of the fit of `access` for figures, at most `max` of all replicas together. */
export async function readDraws(access: Access, max: number): Promise<Draws> {
  const { head, draw, logLikelihood, values } = await thinnedDraws(access, max);
  return {
    replicas: head.replicas,
    stride: head.stride,
    replica: head.rows.flatMap((rows, replica) => Array.from({ length: rows }, () => replica)),
    draw,
    warmup: draw.map((each) => (each < head.warmup ? 1 : 0)),
    logLikelihood: logLikelihood.map(shown),
    columns: Object.fromEntries(head.columns.map((name, i) => [name, values[i].map(shown)])),
  };
}

/**
 * The same draws in a fifth of the bytes, all little-endian: the length of the head in bytes (uint32), the head as JSON
 * padded with spaces to a multiple of four, the draws (uint32), log-likelihoods and columns (float32), one after the other.
 */
export async function packDraws(access: Access, max: number): Promise<ArrayBuffer> {
  const { head, draw, logLikelihood, values } = await thinnedDraws(access, max);
  const text = new TextEncoder().encode(JSON.stringify(head));
  const headBytes = 4 * Math.ceil(text.byteLength / 4);
  const packed = new ArrayBuffer(4 + headBytes + 4 * draw.length * (2 + values.length));
  const view = new DataView(packed);
  view.setUint32(0, headBytes, true);
  const bytes = new Uint8Array(packed);
  bytes.fill(0x20, 4, 4 + headBytes);
  bytes.set(text, 4);
  let at = 4 + headBytes;
  for (const each of draw) {
    view.setUint32(at, each, true);
    at += 4;
  }
  for (const column of [logLikelihood, ...values])
    for (const value of column) {
      view.setFloat32(at, value, true);
      at += 4;
    }
  return packed;
}
