import type { Measurement } from '@/lib/schemas';

/** A measurement as a page is given it: its covariance, which is most of it, as text of a quarter of the length. */
export interface PackedMeasurement extends Omit<Measurement, 'covariance'> {
  /** Rows of the lower triangle with the diagonal, one after the other, little-endian float64 in base64. */
  covariance: string | null;
}

const bytesOf = (rows: number): number => 4 * rows * (rows + 1);

export function packMeasurement(measurement: Measurement): PackedMeasurement {
  const { covariance } = measurement;
  if (!covariance) return { ...measurement, covariance: null };
  const view = new DataView(new ArrayBuffer(bytesOf(covariance.length)));
  let at = 0;
  covariance.forEach((row, i) => {
    for (let j = 0; j <= i; j++, at += 8) view.setFloat64(at, row[j], true);
  });
  let text = '';
  for (let i = 0; i < at; i++) text += String.fromCharCode(view.getUint8(i));
  return { ...measurement, covariance: btoa(text) };
}

/** The measurement that was packed, to the last bit: a stored covariance is symmetric. */
export function unpackMeasurement(packed: PackedMeasurement): Measurement {
  if (packed.covariance === null) return { ...packed, covariance: null };
  const bytes = Uint8Array.from(atob(packed.covariance), (character) => character.charCodeAt(0));
  const view = new DataView(bytes.buffer);
  const rows = packed.points.kappa.length;
  const covariance = Array.from({ length: rows }, () => new Array<number>(rows));
  let at = 0;
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j <= i; j++, at += 8) covariance[i][j] = covariance[j][i] = view.getFloat64(at, true);
  }
  return { ...packed, covariance };
}
