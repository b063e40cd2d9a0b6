import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { planeGrid, scanGrid, scanLine, scanPlane } from '@/lib/inference/scan';
import { seriesModel } from '../lib/inference/scan/generic';
import enso from './data/nist-nls/enso.json';
import series from './data/periodogram/series.json';

const one = (): number => 1;

describe('the scan of two unknown periods', () => {
  it('gives the certified parameters of NIST’s ENSO to six digits', { timeout: 60_000 }, () => {
    const rows = readFileSync(fileURLToPath(new URL('./data/nist-nls/enso.csv', import.meta.url)), 'utf8')
      .trim()
      .split('\n')
      .slice(1)
      .map((line) => line.split(',').map(Number));
    const annual = (2 * Math.PI) / 12;
    const model = seriesModel(
      rows.map(([x]) => x),
      rows.map(([, y]) => y),
      null,
      2,
      [one, (t) => Math.cos(annual * t), (t) => Math.sin(annual * t)],
    );
    const grid = planeGrid(1 / 70, 1 / 15, 2 * Math.PI * 167);
    const { best } = scanPlane(model, grid, { evidence: false });
    const [a1, b1, a2, b2] = best.fit.raw;
    const [c, cos, sin] = best.fit.coefficients.slice(4);
    const found: Record<string, number> = {
      b1: c,
      b2: cos,
      b3: sin,
      b4: 1 / best.mu[0],
      b5: a1,
      b6: b1,
      b7: 1 / best.mu[1],
      b8: a2,
      b9: b2,
    };
    for (const [name, certified] of Object.entries(enso.parameters)) {
      expect(Math.abs(found[name] / certified - 1), name).toBeLessThan(5e-7);
    }
    expect(Math.abs(best.fit.chiSquare[0] / enso.residualSumOfSquares - 1)).toBeLessThan(1e-9);
  });
});

describe('periodograms of published series', () => {
  it.each([
    ['clcep', series.clcep],
    ['dmcep', series.dmcep],
    ['sunspot_year', series.sunspot_year],
  ] as const)('%s: 1 − χ²(f)/χ²₀ is the floating-mean periodogram', (_, data) => {
    const time = data.time.map((t) => t - data.timeReference);
    for (const [expected, error] of [
      [data.unweighted, null],
      ...(data.error && data.weighted ? [[data.weighted, data.error] as const] : []),
    ] as const) {
      const model = seriesModel(time, data.value, error, 1, [one]);
      const [none] = model.background().chiSquare;
      for (const [frequency, power] of expected) {
        const [chiSquare] = model.fit([frequency]).chiSquare;
        expect(Math.abs(1 - chiSquare / none - power)).toBeLessThan(1e-10);
      }
    }
  });

  it('the refined best frequency of a Cepheid is that of a 40-digit fit', () => {
    const { time, value, error, timeReference, fit, chiSquare } = series.clcep;
    const shifted = time.map((t) => t - timeReference);
    const model = seriesModel(shifted, value, error, 1, [one]);
    const length = 2 * Math.PI * (Math.max(...shifted) - Math.min(...shifted));
    const { best } = scanLine(model, scanGrid(0.04, 0.08, length));
    expect(Math.abs(best.mu - fit.f1)).toBeLessThan(1e-8);
    expect(best.fit.chiSquare[0] / chiSquare).toBeCloseTo(1, 9);
    expect(best.fit.raw[0]).toBeCloseTo(fit.A1, 5);
    expect(best.fit.raw[1]).toBeCloseTo(fit.B1, 5);
  });

  it('two frequencies of a double-mode Cepheid come out of the plane', { timeout: 60_000 }, () => {
    const { time, value, error, timeReference, fit, chiSquare } = series.dmcep;
    const model = seriesModel(
      time.map((t) => t - timeReference),
      value,
      error,
      2,
      [one],
    );
    const start = [0.5433353, 0.7410152] as const;
    const { best } = scanPlane(model, planeGrid(0.5, 0.8, 100), { starts: [start], evidence: false });
    expect(Math.abs(best.mu[0] - fit.f2)).toBeLessThan(1e-7);
    expect(Math.abs(best.mu[1] - fit.f1)).toBeLessThan(1e-7);
    expect(best.fit.chiSquare[0] / chiSquare).toBeCloseTo(1, 8);
  });
});
