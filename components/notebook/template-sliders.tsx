'use client';

import { Slider, Sliders } from '@/components/ui/slider';
import { decimalsForSpan } from '@/lib/figures/format';
import { massChains } from '@/lib/inference/mass-order';
import type { CompiledTemplate, Prior } from '@/lib/templates';
import { priorEnds, sliderStep } from './prior-values';
import { priorInWords } from './prior-words';
import { WeightBars } from './weight-bars';

/** Keeps masses in order while one of them moves: those that are passed go along. */
export function moved(
  x: ArrayLike<number>,
  { parameters, blocks }: Pick<CompiledTemplate, 'parameters' | 'blocks'>,
  index: number,
  value: number,
): number[] {
  const next = Array.from(x);
  next[index] = value;
  if (parameters[index].role !== 'mass') return next;
  const chains = massChains(blocks.map(({ kind }) => kind)).map((chain) => chain.map((f) => blocks[f].mass));
  const masses = chains.find((chain) => chain.includes(index)) ?? [];
  const place = masses.indexOf(index);
  masses.forEach((i, at) => {
    if (at < place) next[i] = Math.min(next[i], value);
    if (at > place) next[i] = Math.max(next[i], value);
  });
  return next;
}

/** One slider a parameter over its prior's range; a fixed one has none to move. Below, what the mixing angles come to. */
export function TemplateSliders({
  template,
  priors,
  x,
  onMove,
}: {
  template: CompiledTemplate;
  priors: Readonly<Record<string, Prior>>;
  x: ArrayLike<number>;
  onMove: (x: number[]) => void;
}) {
  const { parameters } = template;
  return (
    <>
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
              onValue={(value) => onMove(moved(x, template, i, value))}
            />
          );
        })}
      </Sliders>
      <WeightBars template={template} x={x} />
    </>
  );
}
