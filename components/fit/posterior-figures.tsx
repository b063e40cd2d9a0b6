'use client';

import { useMemo, useState } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { Num } from '@/components/ui/num';
import { capital, counted, inWords } from '@/components/words/counts';
import { keepPoints } from '@/components/notebook/kept-points';
import { compilePrediction, judge } from '@/components/notebook/prediction';
import { predictiveBand } from '@/lib/inference/prior-predictive';
import { formatCount, formatNumber } from '@/lib/figures/format';
import type { Fit, Measurement } from '@/lib/schemas';
import { bestIndex, drawValues, someKept, type FigureDraws } from './draws';
import { curveOf, type OverlayCurve } from './overlay';
import { OverlayDrop } from './overlay-drop';

/** Draws behind the band of predictions. */
const bandDraws = 400;

/** Values of the parameters that a fit's priors fix. */
export function fixedValues({ snapshot }: Pick<Fit, 'snapshot'>): Record<string, number> {
  return Object.fromEntries(
    Object.entries(snapshot.priors).flatMap(([name, prior]) =>
      prior.kind === 'fixed' ? [[name, prior.value] as const] : [],
    ),
  );
}

export function BestFit({
  fit,
  draws,
  measurement,
  number,
}: {
  fit: Fit;
  draws: FigureDraws;
  measurement: Measurement;
  number: number;
}) {
  const { snapshot } = fit;
  const [laid, setLaid] = useState<(OverlayCurve & { label: string }) | null>(null);
  const drawn = useMemo(() => {
    const points = keepPoints(measurement, snapshot.cuts);
    const best = bestIndex(draws);
    if (best < 0 || !points.rows.length) return null;
    const prediction = compilePrediction(snapshot.template, points);
    const fixed = fixedValues({ snapshot });
    const vector = (index: number) => {
      const values = drawValues(draws, index, fixed);
      return Float64Array.from(prediction.fine.parameters, ({ name }) => values[name]);
    };
    const chosen = someKept(draws, bandDraws);
    const x = vector(best);
    return {
      points,
      kappa: prediction.seen.kappa,
      y: prediction.seen.template.predict(x),
      band: predictiveBand(chosen.map((index) => prediction.seen.template.predict(vector(index)))),
      count: chosen.length,
      free: prediction.fine.parameters.length - Object.keys(fixed).length,
      ...judge(prediction, x),
    };
  }, [measurement, snapshot, draws]);
  if (!drawn) return null;
  const { points, kappa, y, band, count, free, chiSquare } = drawn;
  return (
    <OverlayDrop
      what="a curve (κ, S)"
      laid={laid?.label ?? null}
      onTable={(table, label) => setLaid({ label, ...curveOf(table) })}
      onClear={() => setLaid(null)}
    >
      <PointsFigure
        number={number}
        label="Best draw and range of predictions over the points"
        fileName={`fit-${fit.number}-best`}
        points={{
          kappa: points.kappa,
          value: points.S,
          error: points.sigma,
          lo: points.lo ?? undefined,
          hi: points.hi ?? undefined,
        }}
        curves={[
          { role: 'best', label: 'best draw', kappa, y },
          ...(laid ? [{ role: 'over' as const, ...laid }] : []),
        ]}
        band={{ kappa, ...band, label: '68 and 95 % of the draws' }}
        residuals={drawn.residuals}
        caption={
          <>
            The draw of highest likelihood over the {counted(points.rows.length, 'bin')}, with the range of
            predictions of {formatCount(count)} draws; below, its residuals.{' '}
            <Num>
              <i className="sym">χ</i>² = {formatNumber(chiSquare, 1)}
            </Num>
            {points.factor ? '' : ' from the errors alone'} for {counted(points.rows.length, 'bin')} and{' '}
            {free === 0 ? 'no free parameter' : counted(free, 'free parameter')}.
          </>
        }
      />
    </OverlayDrop>
  );
}

/** "From 10 800 kept draws of fit 3, which met the gate." */
export function posteriorSentence(fit: Fit): string {
  const { progress, replicas, number, status } = fit;
  const kept = formatCount(progress.draws * replicas);
  const verdict: Partial<Record<Fit['status'], string>> = {
    converged: 'which has met the gate',
    sampling: 'which is sampling still; its numbers move',
    stopped: 'which was stopped before every quantity met the gate',
    'budget-spent': 'which used its draws up before every quantity met the gate',
    failed: 'which failed; what it drew until then is shown',
  };
  return `From ${kept} kept draws of ${capital(inWords(replicas)).toLowerCase()} replicas of fit ${number}, ${verdict[status] ?? 'which goes on'}.`;
}
