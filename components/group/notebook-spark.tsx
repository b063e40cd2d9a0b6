'use client';

import { useId, useMemo } from 'react';
import useSWR from 'swr';
import { read, readBytes } from '@/components/api/request';
import { PointsSpark } from '@/components/figures/points-spark';
import { bestIndex, drawValues, unpackDraws, type FigureDraws } from '@/components/fit/draws';
import { fixedValues } from '@/components/fit/posterior-figures';
import { keptRows } from '@/components/notebook/kept-points';
import type { Fit, Measurement, NotebookSummary } from '@/lib/schemas';
import { compileTemplate } from '@/lib/templates';

const once = { revalidateOnFocus: false, revalidateIfStale: false } as const;
/** Draws among which the best one is sought: at 120 px a better one looks the same. */
const draws = 500;
/** Points of the curve. */
const drawn = 121;

/** The prediction of the best of these draws over the kept bins; null where there is none. */
function bestCurve(measurement: Measurement, fit: Fit, given: FigureDraws) {
  const index = bestIndex(given);
  const { template, cuts, measurementVersion } = fit.snapshot;
  const rows = keptRows(measurement.points, cuts);
  if (index < 0 || rows.length < 2 || measurementVersion !== measurement.version) return null;
  const [first, last] = [rows[0], rows[rows.length - 1]].map((row) => measurement.points.kappa[row]);
  const step = Math.log(last / first) / (drawn - 1);
  const kappa = Float64Array.from({ length: drawn }, (_, i) => first * Math.exp(i * step));
  const compiled = compileTemplate(
    template.id,
    { ...template.options, binAverage: false },
    { kind: 'points', kappa },
  );
  const values = drawValues(given, index, fixedValues(fit));
  // With further measurements the background of the first has its number.
  const x = Float64Array.from(compiled.parameters, ({ name }) => values[name] ?? values[`${name}_1`]);
  return { kappa, y: compiled.predict(x) };
}

/** Stands where a blind group may not see points. */
function Withheld({ label }: { label: string }) {
  const hatching = useId();
  return (
    <svg width={120} height={35} role="img" aria-label={label} className="fig-svg spark">
      <defs>
        <pattern id={hatching} width="7" height="7" patternUnits="userSpaceOnUse">
          <path className="veil" d="M-1 1L1 -1M0 7L7 0M6 8L8 6" />
        </pattern>
      </defs>
      <rect x={2} y={8} width={116} height={19} fill={`url(#${hatching})`} />
    </svg>
  );
}

/** A notebook in an index: its points, under the best prediction of its last finished fit. */
export function NotebookSpark({ notebook }: { notebook: NotebookSummary }) {
  const { title, blind, measurementId, measurementVersion, measurementName, finishedFit } = notebook;
  const fitted = blind ? null : finishedFit;
  const { data: measurement } = useSWR(
    blind ? null : `/api/v1/measurements/${measurementId}?version=${measurementVersion}`,
    read<Measurement>,
    once,
  );
  const { data: fit } = useSWR(fitted ? `/api/v1/fits/${fitted}` : null, read<Fit>, once);
  const { data: packed } = useSWR(
    fitted ? `/api/v1/fits/${fitted}/draws?max=${draws}&format=float32` : null,
    async (path: string) => unpackDraws(await readBytes(path)),
    once,
  );
  const curve = useMemo(
    () => (measurement && fit && packed ? bestCurve(measurement, fit, packed) : null),
    [measurement, fit, packed],
  );
  if (blind) return <Withheld label={`Points of ${measurementName}: withheld while blind`} />;
  if (!measurement) return null;
  const { kappa, S, sigma } = measurement.points;
  return (
    <PointsSpark
      kappa={kappa}
      value={S.map((value) => value ?? NaN)}
      error={sigma}
      curve={curve ?? undefined}
      label={`Points of ${measurementName}${curve ? `, with the best prediction of ${title}` : ''}`}
    />
  );
}
