'use client';

import { MatrixFigure } from '@/components/figures/matrix-figure';
import { PointsFigure, type Curve } from '@/components/figures/points-figure';
import { Subheading } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import { counted } from '@/components/words/counts';
import { formatNumber } from '@/lib/figures/format';
import type { Measurement, MeasurementTheory } from '@/lib/schemas';
import { fileNameOf } from './measurement-words';

const listed = (words: readonly string[]): string =>
  words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} and ${words[words.length - 1]}`;

/** Each column over its own largest number, so that columns of different units share an axis. */
function curvesOf({ columns }: MeasurementTheory, kappa: readonly number[]): Curve[] {
  return columns.map(({ name, values }, field) => {
    const largest = Math.max(...values.map(Math.abs));
    return { role: 'field', label: name, field: field % 4, kappa, y: values.map((value) => value / largest) };
  });
}

/** Window, columns and theory covariance that came with a measurement. */
export function TheoryBody({ measurement, theory }: { measurement: Measurement; theory: MeasurementTheory }) {
  const { window: seen, columns, sigma } = theory;
  const { points, name } = measurement;
  const shares = sigma?.map((value, i) => value / points.sigma[i]) ?? [];
  return (
    <>
      <Subheading>How theory becomes these values</Subheading>
      {seen ? (
        <>
          <p>
            A window takes {counted(seen.kappa.length, seen.kappaLo ? 'bin' : 'point')} of the theory to the{' '}
            {counted(points.kappa.length, 'bin')} of the data. Every template is evaluated in the theory’s and
            multiplied by it.
          </p>
          {seen.matrix ? (
            <MatrixFigure
              label={`Window of ${name}`}
              fileName={`${fileNameOf(name)}-window`}
              rows={points.kappa}
              columns={seen.kappa}
              matrix={seen.matrix}
              rowName="data"
              columnName="theory"
              caption={
                <>
                  The window matrix, one row a bin of the data; strength as the root of the share of its
                  largest number, the two signs in two colours.
                </>
              }
            />
          ) : (
            <p className="text-ink-2">It has more numbers than a page can draw; its file is below.</p>
          )}
        </>
      ) : null}
      {columns.length > 0 ? (
        <>
          <p>
            Fitted beside the template, each with a coefficient of its own and not through the window:{' '}
            {listed(columns.map((column) => column.name))}. A notebook sets their priors and may switch each
            off.
          </p>
          <PointsFigure
            label={`Columns of ${name}`}
            fileName={`${fileNameOf(name)}-columns`}
            curves={curvesOf(theory, points.kappa)}
            yName="share"
            caption={
              <>
                The columns against <Sym base="κ" />, each over its own largest number.
              </>
            }
          />
        </>
      ) : null}
      {sigma ? (
        <p>
          A theory covariance is added to that of the data: its errors are{' '}
          {formatNumber(Math.min(...shares), 2)} to {formatNumber(Math.max(...shares), 2)} of theirs. Under
          the normal likelihood the sum is exact. Under Hartlap’s the data’s is divided by the factor first,
          an approximation that holds for many mocks. The t likelihoods don’t take it.
        </p>
      ) : null}
    </>
  );
}
