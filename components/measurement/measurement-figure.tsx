import type { ReactNode } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { WithheldFigure } from '@/components/figures/withheld-figure';
import type { Measurement } from '@/lib/schemas';
import { fileNameOf } from './measurement-words';

/** The points of a measurement, or of the rows of it that are given. */
export function MeasurementFigure({
  measurement,
  kept,
  leftOut = [],
  onPick,
  number,
  caption,
}: {
  measurement: Measurement;
  /** Rows to draw; left out, all. */
  kept?: readonly number[];
  /** Bins that are drawn hollow among them, with the reason why. */
  leftOut?: readonly { bin: number; reason: string }[];
  /** Called with the number of a bin whose point was clicked. */
  onPick?: (bin: number) => void;
  number?: number;
  caption: ReactNode;
}) {
  const { points, name, blind } = measurement;
  if (blind) return <WithheldFigure number={number} label={`Points of ${name}`} caption={caption} />;
  const rows = [...(kept ?? points.kappa.keys()), ...leftOut.map(({ bin }) => bin - 1)].sort((a, b) => a - b);
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
        hollow: leftOut.map(({ bin, reason }) => ({ index: rows.indexOf(bin - 1), reason })),
      }}
      onPick={onPick && ((index) => onPick(rows[index] + 1))}
      caption={caption}
    />
  );
}
