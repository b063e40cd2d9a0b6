'use client';

import { PriorSketch } from '@/components/figures/prior-sketch';
import { SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { Sym, symbolName } from '@/components/ui/sym';
import { isScalarPrior, sketchPrior } from '@/lib/inference/priors';
import { logIsotropicDensity, type ParameterDeclaration, type Prior } from '@/lib/templates';
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

/** The density on a grid; null for what has none to draw. */
export function sketchOf(prior: Prior, angles: number): { x: Float64Array; density: Float64Array } | null {
  if (prior.kind === 'fixed') return null;
  if (isScalarPrior(prior)) {
    try {
      const sketch = sketchPrior(prior);
      return sketch.density.every(Number.isFinite) ? sketch : null;
    } catch {
      return null;
    }
  }
  const x = Float64Array.from({ length: 65 }, (_, i) => (i / 64) * (Math.PI / 2));
  // Of several angles the density depends on the last; the others' is flat.
  return {
    x,
    density: x.map((angle) => Math.exp(logIsotropicDensity(angles > 1 ? [Math.PI / 4, angle] : [angle]))),
  };
}

export function PriorDrawing({
  declaration,
  prior,
  angles,
}: {
  declaration: ParameterDeclaration;
  prior: Prior;
  /** Number of mixing angles that share the isotropic prior; 1 where this one's density is flat. */
  angles: number;
}) {
  const sketch = sketchOf(prior, angles);
  if (!sketch)
    return (
      <span className="font-controls text-note text-ink-2">{prior.kind === 'fixed' ? 'one value' : ''}</span>
    );
  return (
    <PriorSketch
      x={sketch.x}
      density={sketch.density}
      field={declaration.role === 'mass' ? declaration.field : null}
      label={`Prior of ${symbolName(declaration.symbol)}, ${priorInWords(prior, declaration)}`}
    />
  );
}
