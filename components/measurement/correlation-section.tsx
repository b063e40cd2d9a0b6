'use client';

import dynamic from 'next/dynamic';
import useSWR from 'swr';
import { asRequestError, read } from '@/components/api/request';
import { Message } from '@/components/ui/message';
import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { formatCount, formatNumber, formatPercent } from '@/lib/figures/format';
import type { Correlation, Measurement } from '@/lib/schemas';
import { fileNameOf } from './measurement-words';

const CorrelationFigure = dynamic(() =>
  import('@/components/figures/correlation-figure').then((m) => m.CorrelationFigure),
);

/** What a number of mocks means for the numbers in the matrix. */
function MocksMean({ mocks, bins }: { mocks: number; bins: number }) {
  return (
    <p>
      From <Sym base="n" /> = {formatCount(mocks)} mocks. A correlation that is nought in truth scatters by
      about{' '}
      <Num>
        1/√(
        <Sym base="n" /> − 1) = {formatNumber(1 / Math.sqrt(mocks - 1), 3)}
      </Num>
      , so that anything smaller says little; each error is known to{' '}
      {formatPercent(1 / Math.sqrt(2 * (mocks - 1)), 1)}. With {bins} bins there are{' '}
      {formatNumber(mocks / bins, 1)} mocks a bin.
    </p>
  );
}

/** The correlation of the bins as a figure, with what stands behind it. */
export function CorrelationBody({ measurement, number }: { measurement: Measurement; number: number }) {
  const { id, name, version, rows, covarianceSource, mockCount } = measurement;
  const diagonal = covarianceSource === 'errors';
  const { data, error } = useSWR<Correlation, unknown>(
    diagonal ? null : `/api/v1/measurements/${id}/correlation?version=${version}`,
    read<Correlation>,
    { revalidateOnFocus: false, keepPreviousData: true },
  );
  if (diagonal) {
    return (
      <p>
        Only standard errors were given: the covariance is diagonal, every bin is taken as independent of the
        others, and there is no correlation to draw. A newer version with mocks or a covariance would bring
        it.
      </p>
    );
  }
  return (
    <>
      {mockCount === null ? (
        <p>As it was given; without a number of mocks it is taken as known exactly.</p>
      ) : (
        <MocksMean mocks={mockCount} bins={rows} />
      )}
      {error ? (
        <Message level="error" title="The correlation was not read">
          <p>{asRequestError(error).message}</p>
        </Message>
      ) : null}
      {data ? (
        <CorrelationFigure
          number={number}
          label={`Correlation of the bins of ${name}`}
          fileName={`${fileNameOf(name)}-correlation`}
          kappa={data.kappa}
          values={data.values}
          caption={
            <>
              Correlation of the {rows} bins of {name}, version {version}
              {mockCount === null ? '' : `, from ${formatCount(mockCount)} mocks`}, both axes in rising{' '}
              <Sym base="κ" />; strength as √|
              <Sym base="r" />
              |, the two signs in two colours.
            </>
          }
        />
      ) : (
        <div className="my-4 h-[561px] max-w-figure" aria-hidden="true" />
      )}
    </>
  );
}
