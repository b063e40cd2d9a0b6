'use client';

import { useMemo, useState } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { Num } from '@/components/ui/num';
import { capital, counted, inWords } from '@/components/words/counts';
import { keepTogether } from '@/components/notebook/kept-points';
import { compilePrediction, judge, ofPanel } from '@/components/notebook/prediction';
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
  further,
  number,
}: {
  fit: Fit;
  draws: FigureDraws;
  measurement: Measurement;
  /** Further measurements of the fit, in their order. */
  further: readonly Measurement[];
  number: number;
}) {
  const { snapshot } = fit;
  const [laid, setLaid] = useState<(OverlayCurve & { label: string }) | null>(null);
  const drawn = useMemo(() => {
    const points = keepTogether(
      measurement,
      snapshot.cuts,
      further.map((each, k) => ({ measurement: each, cuts: snapshot.also?.[k].cuts ?? {} })),
    );
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
      data: prediction.data,
      panels: prediction.panels.map((panel) => ({
        ...panel,
        y: panel.seen.template.predict(x),
        band: predictiveBand(chosen.map((index) => panel.seen.template.predict(vector(index)))),
      })),
      count: chosen.length,
      free: prediction.fine.parameters.length - Object.keys(fixed).length,
      ...judge(prediction, x),
    };
  }, [measurement, further, snapshot, draws]);
  if (!drawn) return null;
  const { data, panels, count, free, chiSquare } = drawn;
  const several = panels.length > 1;
  return (
    <OverlayDrop
      what="a curve (κ, S)"
      laid={laid?.label ?? null}
      onTable={(table, label) => setLaid({ label, ...curveOf(table) })}
      onClear={() => setLaid(null)}
    >
      {panels.map((panel, k) => (
        <PointsFigure
          key={panel.label}
          number={k === 0 ? number : undefined}
          label={`Best draw and range of predictions over the points${several ? ` of ${panel.label}` : ''}`}
          fileName={`fit-${fit.number}-best${k === 0 ? '' : `-${k + 1}`}`}
          points={{
            kappa: panel.points.kappa,
            value: panel.points.S,
            error: panel.points.sigma,
            lo: panel.points.lo ?? undefined,
            hi: panel.points.hi ?? undefined,
          }}
          curves={[
            { role: 'best', label: 'best draw', kappa: panel.seen.kappa, y: panel.y },
            ...(laid ? [{ role: 'over' as const, ...laid }] : []),
          ]}
          band={{ kappa: panel.seen.kappa, ...panel.band, label: '68 and 95 % of the draws' }}
          residuals={ofPanel(drawn.residuals, panel)}
          caption={
            k > 0 ? (
              <>
                The same draws over the {counted(panel.points.rows.length, 'bin')} of {panel.label}, and the
                residuals of the best.
              </>
            ) : (
              <>
                The draw of highest likelihood over the {counted(panel.points.rows.length, 'bin')}
                {several ? ` of ${panel.label}` : ''}, with the range of predictions of {formatCount(count)}{' '}
                draws; below, its residuals.{' '}
                <Num>
                  <i className="sym">χ</i>² = {formatNumber(chiSquare, 1)}
                </Num>
                {data.factor ? '' : ' from the errors alone'} for {counted(data.rows.length, 'bin')}
                {several ? ' of all measurements, each with its own covariance,' : ''} and{' '}
                {free === 0 ? 'no free parameter' : counted(free, 'free parameter')}.
              </>
            )
          }
        />
      ))}
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
