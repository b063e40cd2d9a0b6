'use client';

import { useEffect, useState } from 'react';
import { isScalarPrior } from '@/lib/inference/priors';
import { amplitudeBias, reachOf } from '@/lib/inference/template-accuracy';
import {
  isLightMass,
  TemplateError,
  type FieldKind,
  type ParameterDeclaration,
  type Prior,
  type Vertex,
} from '@/lib/templates';
import { dataAxis, type KeptPoints } from './kept-points';
import type { TemplateSettings } from './prediction';
import { priorQuantile } from './prior-values';

/** Shares of the amplitude at which a reach is given. */
export const shares = [0.01, 0.05, 0.1] as const;
/** Numbers of powers of κ, from κ on, that are compared. */
export const powerCounts = [1, 2, 3, 4] as const;
/** Heavier fields have an exact shape that isn't tabulated; their amplitude is below 1e-26 anyway. */
const heaviest = 20;
/** Cuts at which a curve is evaluated. */
const cutsDrawn = 32;

/** How wrong an amplitude comes out by the highest κ that is kept, at one mass. */
export interface MassAccuracy {
  kind: FieldKind;
  mass: number;
  /** One curve for every count of powerCounts, then that of the background as set; worst vertex, by cut. */
  curves: Float64Array[];
  /** The same at the cut that is set. */
  atCut: number[];
  /** By curve and share: highest κ that keeps it; NaN where none does. */
  reach: number[][];
}

export interface TemplateAccuracy {
  /** Upper end of every cut, ascending. */
  kappa: number[];
  /** The cut that is set, and the lowest κ that is kept. */
  cut: number;
  lowest: number;
  masses: MassAccuracy[];
}

/** Lower, middle and upper mass of what the priors hold likely: quantiles at 10, 50 and 90 %, of each kind of field. */
export function likelyMasses(
  parameters: readonly ParameterDeclaration[],
  priors: Readonly<Record<string, Prior>>,
): { kind: FieldKind; mass: number }[] {
  const kinds: FieldKind[] = ['light', 'heavy'];
  return kinds.flatMap((kind) => {
    const own = parameters.filter(
      (declaration) => declaration.role === 'mass' && isLightMass(declaration) === (kind === 'light'),
    );
    const at = (p: number) =>
      own.map((declaration) => {
        const prior = priors[declaration.name] ?? declaration.defaultPrior;
        return prior.kind === 'fixed' ? prior.value : isScalarPrior(prior) ? priorQuantile(prior, p) : NaN;
      });
    if (own.length === 0) return [];
    const middle = at(0.5).reduce((sum, mass) => sum + mass, 0) / own.length;
    const three = [Math.min(...at(0.1)), middle, Math.max(...at(0.9))];
    const inRange = three.map((mass) => (kind === 'heavy' ? Math.min(mass, heaviest) : mass));
    return [...new Set(inRange.filter(Number.isFinite))].map((mass) => ({ kind, mass }));
  });
}

function verticesOf({ options }: TemplateSettings): Vertex[] {
  return options.vertex === 1 || options.vertex === 2 ? [options.vertex] : [1, 2];
}

/** Numbers of bins, from the lowest, at which curves are evaluated; the cut that is set is among them. */
function cutCounts(bins: number, kept: number): number[] {
  const step = Math.max(1, bins / cutsDrawn);
  const counts = new Set([kept, bins]);
  for (let count = 3; count < bins; count += step) counts.add(Math.round(count));
  return [...counts].sort((a, b) => a - b);
}

/** What is asked of one mass; the powers as set come last. */
function accuracyAt(
  { kind, mass }: { kind: FieldKind; mass: number },
  settings: TemplateSettings,
  wide: KeptPoints,
  counts: readonly number[],
  kappa: readonly number[],
  kept: number,
): MassAccuracy {
  const own = Array.isArray(settings.options.background) ? (settings.options.background as number[]) : [];
  const powers = [...powerCounts.map((count) => [1, 2, 3, 4].slice(0, count)), own];
  const byVertex = verticesOf(settings).map((vertex) =>
    amplitudeBias({
      kind,
      mass,
      vertex,
      axis: dataAxis(wide, settings.options),
      powers,
      metric: wide.factor ? { factor: wide.factor } : { sigma: wide.sigma },
      counts,
    }),
  );
  const curves = powers.map((_, k) =>
    Float64Array.from(counts, (_count, i) => Math.max(...byVertex.map((bias) => bias[k][i]))),
  );
  const lowest = (wide.lo ?? wide.kappa)[0];
  return {
    kind,
    mass,
    curves,
    atCut: curves.map((curve) => curve[counts.indexOf(kept)]),
    reach: curves.map((curve) => shares.map((share) => reachOf(curve, kappa, lowest, share))),
  };
}

/**
 * The accuracy on these bins, mass after mass, so that the page stays free in between; null until all are there, a sentence
 * where none can be had.
 */
export function useTemplateAccuracy(
  settings: TemplateSettings,
  masses: readonly { kind: FieldKind; mass: number }[],
  /** All bins from the lowest one kept on. */
  wide: KeptPoints,
  kept: number,
): TemplateAccuracy | string | null {
  const [found, setFound] = useState<TemplateAccuracy | string | null>(null);
  const asked = JSON.stringify([settings.id, settings.options, masses, kept]);
  useEffect(() => {
    const upper = wide.hi ?? wide.kappa;
    const counts = cutCounts(upper.length, kept);
    const kappa = counts.map((count) => upper[count - 1]);
    const done: MassAccuracy[] = [];
    let timer = setTimeout(next, 30);
    function next() {
      const wanted = masses[done.length];
      if (!wanted) {
        setFound({ kappa, cut: upper[kept - 1], lowest: (wide.lo ?? wide.kappa)[0], masses: done });
        return;
      }
      try {
        done.push(accuracyAt(wanted, settings, wide, counts, kappa, kept));
      } catch (error) {
        if (!(error instanceof TemplateError)) throw error;
        setFound(`${error.message}.`);
        return;
      }
      timer = setTimeout(next, 0);
    }
    return () => clearTimeout(timer);
    // eslint-disable-next-line react-hooks/exhaustive-deps -- `asked` stands for settings and masses, made anew with every drawing
  }, [asked, wide]);
  return found;
}

/** Fewest powers that keep the amplitude within `share` at the cut; null where four don't. */
export function powersNeeded(accuracy: MassAccuracy, share: number): number | null {
  return powerCounts.find((_, k) => accuracy.atCut[k] <= share) ?? null;
}
