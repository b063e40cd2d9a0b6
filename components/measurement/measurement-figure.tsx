import type { ReactNode } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { WithheldFigure } from '@/components/figures/withheld-figure';
import type { Measurement } from '@/lib/schemas';
import { fileNameOf } from './measurement-words';

/** The points of a measurement, or of the rows of it that are given. */
export function MeasurementFigure({
  measurement,
  kept,
  number,
  caption,
}: {
  measurement: Measurement;
  /** Rows to draw; left out, all. */
  kept?: readonly number[];
  number: number;
  caption: ReactNode;
}) {
  const { points, name, blind } = measurement;
  if (blind) return <WithheldFigure number={number} label={`Points of ${name}`} caption={caption} />;
  const rows = kept ?? points.kappa.map((_, i) => i);
  const take = (values: readonly (number | null)[]) => rows.map((i) => values[i] ?? NaN);
  return (
    <PointsFigure
      number={number}
      label={`Points of ${name}`}
      fileName={`${fileNameOf(name)}-points`}
      points={{
        kappa: take(points.kappa),
        value: take(points.S),
        error: take(points.sigma),
        lo: points.kappaLo ? take(points.kappaLo) : undefined,
        hi: points.kappaHi ? take(points.kappaHi) : undefined,
      }}
      caption={caption}
    />
  );
}
