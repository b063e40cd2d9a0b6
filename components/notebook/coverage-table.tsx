'use client';

import { useMemo } from 'react';
import { Caution } from '@/components/ui/caution';
import { Num } from '@/components/ui/num';
import { DataTable } from '@/components/ui/table';
import { counted } from '@/components/words/counts';
import { formatCount, formatNumber } from '@/lib/figures/format';
import { InferenceError } from '@/lib/inference/inference-error';
import { intervalCoverage, type IntervalCoverage } from '@/lib/inference/interval-coverage';
import { likelihoodKinds, likelihoods, type LikelihoodKind } from './likelihood-words';

export interface CoverageTableProps {
  /** Bins kept, mocks, sampled parameters. */
  bins: number;
  mocks: number;
  parameters: number;
  /** The likelihood as it is chosen. */
  chosen: LikelihoodKind;
}

const trials = 20_000;
const contents = [0.68, 0.95] as const;
/** Coverage is called short beyond this share of it. */
const short = 0.03;

/** Coverage of 68 and 95 % intervals by each likelihood, simulated; null where there are too few mocks for it. */
function simulated(kind: LikelihoodKind, bins: number, mocks: number, parameters: number) {
  try {
    return contents.map((content) =>
      intervalCoverage(
        { likelihood: kind, length: bins, mocks, parameters, content, trials },
        `${kind} at ${content}`,
      ),
    );
  } catch (error) {
    if (error instanceof InferenceError) return null;
    throw error;
  }
}

const inPercent = ({ covered }: IntervalCoverage) => `${formatNumber(100 * covered, 1)} %`;

/** What intervals are worth with this many mocks, bins and parameters. */
export function CoverageTable({ bins, mocks, parameters, chosen }: CoverageTableProps) {
  const rows = useMemo(
    () => likelihoodKinds.map((kind) => ({ kind, found: simulated(kind, bins, mocks, parameters) })),
    [bins, mocks, parameters],
  );
  const own = rows.find(({ kind }) => kind === chosen)?.found;
  const lacks = own && contents[0] - own[0].covered > short;
  return (
    <>
      <DataTable
        caption={
          <>
            How often an interval holds the truth, over {formatCount(trials)} simulations of data and of{' '}
            {formatCount(mocks)} mocks, for {counted(bins, 'bin')} and {counted(parameters, 'parameter')} that
            enter linearly; the width is against that with the covariance known.
          </>
        }
        columns={[
          { key: 'likelihood', head: 'likelihood' },
          { key: '0.68', head: '68 %', numeric: true },
          { key: '0.95', head: '95 %', numeric: true },
          { key: 'width', head: 'width', numeric: true },
        ]}
        rows={rows.map(({ kind, found }) => ({
          key: kind,
          cells: {
            likelihood: `${likelihoods[kind].label}${kind === chosen ? ', as chosen' : ''}`,
            '0.68': found ? inPercent(found[0]) : 'too few mocks',
            '0.95': found ? inPercent(found[1]) : '',
            width: found ? formatNumber(found[0].width, 2) : '',
          },
        }))}
      />
      {lacks ? (
        <Caution>
          With the likelihood chosen a 68 % interval holds the truth in <Num>{inPercent(own[0])}</Num> of
          cases only: {mocks} mocks are few for {bins} bins.
        </Caution>
      ) : null}
    </>
  );
}
