import { describe, expect, it } from 'vitest';
import { packMeasurement, unpackMeasurement } from '@/components/notebook/packed-measurement';
import type { Measurement } from '@/lib/schemas';

const kappa = [0.01, 0.02, 0.05];
const covariance = [
  [1.1e-9, -3 / 7, Number.MIN_VALUE],
  [-3 / 7, 2.5, 1 / 3],
  [Number.MIN_VALUE, 1 / 3, 9.99e300],
];
const measurement = (given: Measurement['covariance']) =>
  ({ name: 'Larkfield', points: { kappa }, covariance: given }) as Measurement;

describe('a packed measurement', () => {
  it('comes back to the last bit', () => {
    const packed = packMeasurement(measurement(covariance));
    expect(typeof packed.covariance).toBe('string');
    expect(unpackMeasurement(packed)).toEqual(measurement(covariance));
  });

  it('is a third as long or less', () => {
    const rows = 40;
    const full = Array.from({ length: rows }, (_, i) =>
      Array.from({ length: rows }, (_, j) => Math.sqrt(2 + i * j) / 1e7),
    );
    const given = { ...measurement(full), points: { kappa: full[0] } } as Measurement;
    const [long, short] = [given, packMeasurement(given)].map(
      (each) => JSON.stringify(each.covariance).length,
    );
    expect(short).toBeLessThan(long / 3);
  });

  it('has none where none was given', () => {
    expect(unpackMeasurement(packMeasurement(measurement(null))).covariance).toBeNull();
  });
});
