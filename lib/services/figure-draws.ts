import type { Draws } from '@/lib/schemas';
import type { Access } from './access';
import { thinnedDraws, type ThinnedDraws } from './thinned-draws';

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
  const thinned = await thinnedDraws(access, max);
  const known = packed.get(thinned) ?? pack(thinned);
  packed.set(thinned, known);
  return known;
}

/** Draws that are kept are packed once for all who ask. */
const packed = new WeakMap<ThinnedDraws, ArrayBuffer>();

function pack({ head, draw, logLikelihood, values }: ThinnedDraws): ArrayBuffer {
  const text = new TextEncoder().encode(JSON.stringify(head));
  const headBytes = 4 * Math.ceil(text.byteLength / 4);
  const made = new ArrayBuffer(4 + headBytes + 4 * draw.length * (2 + values.length));
  const view = new DataView(made);
  view.setUint32(0, headBytes, true);
  const bytes = new Uint8Array(made);
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
  return made;
}
