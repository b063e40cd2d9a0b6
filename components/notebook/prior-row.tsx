'use client';

import { PriorSketch } from '@/components/figures/prior-sketch';
import { SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { Sym, symbolName } from '@/components/ui/sym';
import { plain } from '@/components/words/counts';
import type { OrderedMarginal } from '@/lib/inference/ordered-masses';
import { isScalarPrior, sketchPrior } from '@/lib/inference/priors';
import { isotropicMarginal, type ParameterDeclaration, type Prior } from '@/lib/templates';
import { priorEnds } from './prior-values';
import { convertPrior, fieldWords, kindsFor, priorFields, priorInWords, priorKinds } from './prior-words';

/** The numbers of a prior by name; NaN while a field is empty. */
function numbersOf(prior: Prior): Record<string, number> {
  return Object.fromEntries(
    Object.entries(prior).filter((entry): entry is [string, number] => typeof entry[1] === 'number'),
  );
}

export function ParameterName({ declaration }: { declaration: ParameterDeclaration }) {
  return (
    <span className="flex items-baseline gap-[10px] font-words text-[17px]/[28px] whitespace-nowrap">
      <Sym {...declaration.symbol} />
      <small className="font-controls text-note text-ink-2">{declaration.label}</small>
    </span>
  );
}

/** Choice of the kind and its numbers, in one line. */
export function PriorFields({
  declaration,
  prior,
  faults,
  onPrior,
}: {
  declaration: ParameterDeclaration;
  prior: Prior;
  /** What is wrong, by the name of a number; `kind` for the choice itself. */
  faults: Readonly<Record<string, string>>;
  onPrior: (prior: Prior) => void;
}) {
  const allowed = kindsFor(declaration);
  const kinds = allowed.includes(prior.kind) ? allowed : [...allowed, prior.kind];
  const numbers = numbersOf(prior);
  const ends = () => {
    const found = Object.values(numbers).every(Number.isFinite) ? priorEnds(prior, declaration) : [0, 1];
    return prior.kind === 'fixed'
      ? priorEnds(declaration.defaultPrior, declaration)
      : ([found[0], found[1]] as const);
  };
  return (
    <div className="flex flex-wrap items-start gap-x-2">
      <div className="w-[148px] max-tablet:w-full">
        <SelectField
          hiddenLabel={`Prior of ${declaration.label}`}
          name={`${declaration.name}-kind`}
          value={prior.kind}
          options={priorKinds
            .filter(({ kind }) => kinds.includes(kind))
            .map(({ kind, label }) => ({ value: kind, label }))}
          onChange={(event) =>
            onPrior(convertPrior(event.target.value as Prior['kind'], ends(), declaration))
          }
        />
      </div>
      {priorFields[prior.kind].map((name) => (
        <div key={name} className="flex items-start gap-[8px] max-tablet:flex-1">
          <span aria-hidden="true" className="pt-[6px] font-controls text-note text-ink-2">
            {fieldWords[name]}
          </span>
          <div className="w-[72px] max-tablet:w-full max-tablet:min-w-[72px]">
            <NumberField
              hiddenLabel={`${declaration.label}, ${fieldWords[name]}`}
              name={`${declaration.name}-${name}`}
              value={Number.isFinite(numbers[name]) ? shown(numbers[name]) : null}
              invalid={faults[name] !== undefined}
              onValue={(value) => onPrior({ ...prior, [name]: value ?? NaN } as Prior)}
            />
          </div>
        </div>
      ))}
    </div>
  );
}

/** Seven figures are enough to read; the stored number keeps all of its own unless it is written over. */
const shown = (value: number) => Number(value.toPrecision(7));

/** One mixing angle among those that share the isotropic prior. */
export interface AngleOf {
  /** Number of fields. */
  fields: number;
  /** Which of their fields − 1 angles, from 0. */
  index: number;
}

/** The density on a grid, of an angle with the others integrated out; null for what has none to draw. */
export function sketchOf(
  prior: Prior,
  angle: AngleOf | null,
): { x: Float64Array; density: Float64Array } | null {
  if (prior.kind === 'fixed') return null;
  if (isScalarPrior(prior)) {
    try {
      const sketch = sketchPrior(prior);
      return sketch.density.every(Number.isFinite) ? sketch : null;
    } catch {
      return null;
    }
  }
  if (angle === null) return null;
  const x = Float64Array.from({ length: 65 }, (_, i) => (i / 64) * (Math.PI / 2));
  return { x, density: x.map((at) => isotropicMarginal(angle.fields, angle.index, at)) };
}

export function PriorDrawing({
  declaration,
  prior,
  angle,
  induced,
}: {
  declaration: ParameterDeclaration;
  prior: Prior;
  /** Where it stands among the mixing angles; null for what is none. */
  angle: AngleOf | null;
  /** What order leaves of a mass' prior. */
  induced: OrderedMarginal | null;
}) {
  const sketch = sketchOf(prior, angle);
  if (!sketch)
    return (
      <span className="font-controls text-note text-ink-2">{prior.kind === 'fixed' ? 'one value' : ''}</span>
    );
  return (
    <PriorSketch
      x={sketch.x}
      density={sketch.density}
      induced={induced ? within(induced, sketch.x) : undefined}
      field={declaration.role === 'mass' ? declaration.field : null}
      label={`Prior of ${symbolName(declaration.symbol)}, ${priorInWords(prior, declaration)}${induced ? `; in order its median is ${plain(medianOf(induced), 3)}` : ''}`}
    />
  );
}

/** The part of an induced marginal that the stated density's drawing has room for: beyond it there is no density. */
function within({ x, density }: OrderedMarginal, room: Float64Array): { x: number[]; density: number[] } {
  const [lo, hi] = [room[0], room[room.length - 1]];
  const inside = Array.from(x.keys()).filter((i) => x[i] >= lo && x[i] <= hi);
  return { x: inside.map((i) => x[i]), density: inside.map((i) => density[i]) };
}

/** Where its distribution function passes one half. */
function medianOf({ x, cdf }: OrderedMarginal): number {
  const above = cdf.findIndex((value) => value >= 0.5);
  if (above <= 0) return x[0];
  const part = (0.5 - cdf[above - 1]) / (cdf[above] - cdf[above - 1]);
  return x[above - 1] + part * (x[above] - x[above - 1]);
}
