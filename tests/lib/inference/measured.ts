import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { buildInference, type FitData, type Inference } from '@/lib/inference';
import { compileTemplate, type Axis, type Prior } from '@/lib/templates';

/** Measurement files with mocks, derived by us (see tests/data/measurements/README.md). */
function rowsOf(file: string): number[][] {
  const path = fileURLToPath(new URL(`../../data/measurements/${file}`, import.meta.url));
  return readFileSync(path, 'utf8')
    .trim()
    .split('\n')
    .filter((line) => /^[-+.\d]/.test(line))
    .map((line) => line.split(',').map(Number));
}

/** Bins below the cut, and the sample covariance of their mocks. */
export function measurement(
  name: string,
  kappaMax: number,
): { axis: Axis & { kind: 'bins' }; data: FitData } {
  const rows = rowsOf(`${name}.csv`);
  const kept = rows.flatMap((row, i) => (row[1] <= kappaMax * (1 + 1e-9) ? [i] : []));
  const mocks = rowsOf(`${name}-mocks.csv`);
  const mean = kept.map((i) => mocks.reduce((sum, mock) => sum + mock[i], 0) / mocks.length);
  const covariance = kept.flatMap((i, a) =>
    kept.map((j, b) => {
      const sum = mocks.reduce((total, mock) => total + (mock[i] - mean[a]) * (mock[j] - mean[b]), 0);
      return sum / (mocks.length - 1);
    }),
  );
  return {
    axis: {
      kind: 'bins',
      lo: Float64Array.from(kept, (i) => rows[i][0]),
      hi: Float64Array.from(kept, (i) => rows[i][1]),
      weightPower: 0,
    },
    data: {
      S: Float64Array.from(kept, (i) => rows[i][3]),
      covariance: Float64Array.from(covariance),
      mockCount: mocks.length,
    },
  };
}

/** The default fit of such a measurement, up to κ = 0.2 unless said, some priors replaced. */
export function fitMeasurement(
  name: string,
  id: string,
  options: Record<string, unknown>,
  replaced: Record<string, Prior> = {},
  kappaMax = 0.2,
): Inference {
  const { axis, data } = measurement(name, kappaMax);
  const template = compileTemplate(id, options, axis);
  const priors = Object.fromEntries(
    template.parameters.map((p) => [p.name, replaced[p.name] ?? p.defaultPrior]),
  );
  return buildInference({ data, likelihood: 'matched-t', template, priors });
}
