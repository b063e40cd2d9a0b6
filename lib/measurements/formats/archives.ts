import { Gunzip, unzipSync } from 'fflate';
import { MeasurementError } from '../errors';
import type { Part } from '../types';
import { damaged } from './table';

/** gzip and zip by fflate, with the room that what comes out may take; what a file announces of itself is not believed. */

const PIECE = 64 * 1024;

function tooLarge(part: Part, limit: number): MeasurementError {
  const size = `${Math.floor(limit / 1024 / 1024)} MB`;
  return new MeasurementError('file-too-large', `Unpacked, the file is larger than ${size}.`, { part });
}

export function isGzip(bytes: Uint8Array): boolean {
  return bytes[0] === 0x1f && bytes[1] === 0x8b;
}

export function isZip(bytes: Uint8Array): boolean {
  return bytes[0] === 0x50 && bytes[1] === 0x4b && (bytes[2] === 3 || bytes[2] === 5 || bytes[2] === 7);
}

/** The content of a gzip file, at most `limit` bytes; checked against its CRC-32 and length. */
export function gunzip(bytes: Uint8Array, part: Part, limit: number): Uint8Array {
  const pieces: Uint8Array[] = [];
  let length = 0;
  const stream = new Gunzip((piece) => {
    length += piece.length;
    if (length > limit) throw tooLarge(part, limit);
    pieces.push(piece);
  });
  try {
    for (let at = 0; at < bytes.length; at += PIECE) {
      stream.push(bytes.subarray(at, at + PIECE), at + PIECE >= bytes.length);
    }
  } catch (error) {
    if (error instanceof MeasurementError) throw error;
    throw damaged(part, 'The gzip file is cut off or altered.');
  }
  const whole = new Uint8Array(length);
  let at = 0;
  for (const piece of pieces) {
    whole.set(piece, at);
    at += piece.length;
  }
  const end = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  // Several members in one file have a CRC of the last one only: they are rare, and what came out was bounded.
  const single = bytes.length >= 18 && end.getUint32(bytes.length - 4, true) === length >>> 0;
  if (single && end.getUint32(bytes.length - 8, true) !== crc32(whole)) {
    throw damaged(part, 'The gzip file is altered: its checksum differs.');
  }
  if (length === 0) throw damaged(part, 'The gzip file is empty or cut off.');
  return whole;
}

/** Arrays of an NPZ archive by name, without `.npy`; at most `limit` bytes in all and 1,000 entries. */
export function unzipArrays(bytes: Uint8Array, part: Part, limit: number): Map<string, Uint8Array> {
  const sizes = new Map<string, number>();
  let total = 0;
  let entries: Record<string, Uint8Array>;
  try {
    entries = unzipSync(bytes, {
      filter: ({ name, originalSize, compression }) => {
        if (!name.endsWith('.npy')) return false;
        if (sizes.has(name)) throw damaged(part, 'The archive holds two arrays of one name.');
        if (compression !== 0 && compression !== 8)
          throw damaged(part, 'The archive is packed in a way that isn’t read.');
        total += originalSize;
        sizes.set(name, originalSize);
        if (total > limit || sizes.size > 1000) throw tooLarge(part, limit);
        return true;
      },
    });
  } catch (error) {
    if (error instanceof MeasurementError) throw error;
    throw damaged(part, 'The archive is cut off or altered.');
  }
  const arrays = new Map<string, Uint8Array>();
  for (const [name, size] of sizes) {
    const content = entries[name];
    if (content.length !== size)
      throw damaged(part, 'An array of the archive has another length than announced.');
    arrays.set(name.replace(/\.npy$/, ''), content);
  }
  return arrays;
}

const CRC_TABLE = Uint32Array.from({ length: 256 }, (_, n) => {
  let c = n;
  for (let k = 0; k < 8; k += 1) c = c & 1 ? (c >>> 1) ^ 0xedb88320 : c >>> 1;
  return c >>> 0;
});

/** CRC-32 of ISO 3309, as gzip and zip use it (RFC 1952, section 8). */
function crc32(bytes: Uint8Array): number {
  let crc = 0xffffffff;
  for (const byte of bytes) crc = (crc >>> 8) ^ CRC_TABLE[(crc ^ byte) & 255];
  return (crc ^ 0xffffffff) >>> 0;
}
