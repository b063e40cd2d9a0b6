'use client';

import { Slider, Sliders } from '@/components/ui/slider';
import { decimalsForSpan } from '@/lib/figures/format';
import type { ParameterDeclaration, Prior } from '@/lib/templates';
import { priorEnds, sliderStep } from './prior-values';
import { priorInWords } from './prior-words';

/** Keeps masses in order while one of them moves: those that are passed go along. */
export function moved(
  x: ArrayLike<number>,
  parameters: readonly ParameterDeclaration[],
  index: number,
  value: number,
): number[] {
  const next = Array.from(x);
  next[index] = value;
  if (parameters[index].role !== 'mass') return next;
  const masses = parameters.flatMap(({ role }, i) => (role === 'mass' ? [i] : []));
  const place = masses.indexOf(index);
  masses.forEach((i, at) => {
    if (at < place) next[i] = Math.min(next[i], value);
    if (at > place) next[i] = Math.max(next[i], value);
  });
  return next;
}

/** One slider a parameter over its prior's range; a fixed one has none to move. */
export function TemplateSliders({
  parameters,
  priors,
  x,
  onMove,
}: {
  parameters: readonly ParameterDeclaration[];
  priors: Readonly<Record<string, Prior>>;
  x: ArrayLike<number>;
  onMove: (x: number[]) => void;
}) {
  return (
    <Sliders>
      {parameters.map((declaration, i) => {
        const prior = priors[declaration.name] ?? declaration.defaultPrior;
        const [lo, hi] = priorEnds(prior, declaration);
        return (
          <Slider
            key={declaration.name}
            symbol={declaration.symbol}
            label={declaration.label}
            field={declaration.role === 'background' ? null : declaration.field}
            lo={lo}
            hi={hi}
            step={sliderStep(lo, hi)}
            decimals={decimalsForSpan(lo, hi)}
            value={x[i]}
            prior={priorInWords(prior, declaration)}
            disabled={prior.kind === 'fixed'}
            onValue={(value) => onMove(moved(x, parameters, i, value))}
          />
        );
      })}
    </Sliders>
  );
}
