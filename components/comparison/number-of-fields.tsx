'use client';

import { figureNumber } from '@/components/notebook/sections';
import { Caution } from '@/components/ui/caution';
import type { ComparedFit, Comparison } from '@/lib/schemas';
import { defaultFieldCounts } from '@/lib/schemas/field-counts';
import { CountFigure, type CountPoint } from './count-figure';
import { CountTable } from './count-table';
import { SharedTable } from './shared-table';
import { WidthsPart } from './widths-part';

/** Bayes factors for the figure: to no field where that has an evidence, else to the best. */
function pointsOf(counts: Comparison['counts']): { points: CountPoint[]; against: string } {
  const toNone = counts.some(({ lnBayesNone }) => lnBayesNone);
  const points = counts.flatMap(({ fields, lnBayesNone, lnBayesBest }) => {
    const factor = toNone ? lnBayesNone : lnBayesBest;
    return factor ? [{ fields, value: factor.value, error: factor.error }] : [];
  });
  return { points, against: toNone ? 'no field' : 'the best' };
}

/** Evidence and Bayes factor against the number of fields, and against the amplitude prior's width. */
export function NumberOfFields({
  comparison,
  fits,
}: {
  comparison: Comparison;
  fits: ReadonlyMap<string, ComparedFit>;
}) {
  const counts = comparison.counts.filter(
    ({ fields, fit }) => fit !== null || defaultFieldCounts.includes(fields),
  );
  const { points, against } = pointsOf(counts);
  const compared = counts.flatMap(({ fit }) => (fit ? (fits.get(fit) ?? []) : []));
  return (
    <>
      <CountTable counts={counts} fits={fits} />
      {points.length > 1 ? (
        <CountFigure number={figureNumber('bayes-factors')} points={points} against={against} />
      ) : null}
      <Caution>
        Bayes factors depend on the amplitude prior’s width: a prior twice as wide takes about ln 2 off for
        each amplitude that the data settle. They compare the models that are listed, and say nothing of
        others.
      </Caution>
      {points.length > 1 ? <WidthsPart comparison={comparison} /> : null}
      <SharedTable fits={compared} />
    </>
  );
}
