'use client';

import { use, useMemo, useState, type ReactNode } from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';
import { marginal, marginalText } from '@/lib/figures/corner';
import { FigureTime, usePrinting } from '../ui/fold';
import { Sym, symbolName } from '../ui/sym';
import { CornerDrawing, cornerHeight, type ShownJoint, type ShownParameter } from './corner-drawing';
import { Figure, useNarrow, type FigureFacts } from './figure';
import { useCornerSketch, type Sketched } from './use-corner-sketch';

export interface CornerParameter {
  name: string;
  symbol: { base: string; sub: string };
  /** In words: "mass 1". */
  label: string;
  /** 0-based field whose colour and dash the density takes; null for ink. */
  field: number | null;
}

/** Samples from elsewhere, drawn dashed over the draws. */
export interface CornerOverlay {
  /** Name in the key. */
  label: string;
  /** One array a parameter, in the order of `parameters`; null where the samples don't have it. */
  draws: readonly (ArrayLike<number> | null)[];
}

export interface CornerFigureProps extends FigureFacts {
  parameters: readonly CornerParameter[];
  /** Kept draws of all replicas, one array a parameter, in the order of `parameters`; the same object while they are the same. */
  draws: readonly ArrayLike<number>[];
  /** Names of those shown at first; left out, the first five. */
  initial?: readonly string[];
  /** Monte Carlo standard error of each median; it sets the digits above the diagonal. */
  mcse?: readonly number[];
  /** Values that were put in, by name, where the data are simulated. */
  truth?: Readonly<Record<string, number>>;
  /** Keep it the same object while it is the same. */
  overlay?: CornerOverlay;
  /** Stands beside the choice of parameters. */
  aside?: ReactNode;
}

/** As many as a screen can carry. */
const most = { wide: 5, narrow: 3 };

/** Densities and joint regions of up to five parameters, chosen by the reader. */
export function CornerFigure(props: CornerFigureProps) {
  const { parameters, draws, initial, mcse, truth, overlay, aside } = props;
  const narrow = useNarrow();
  const printing = usePrinting();
  const drawn = use(FigureTime) === 'now';
  const [chosen, setChosen] = useState(
    () => initial?.slice(0, most.wide) ?? parameters.slice(0, most.wide).map((p) => p.name),
  );
  const limit = narrow ? most.narrow : most.wide;
  const places = parameters.flatMap(({ name }, i) => (chosen.includes(name) ? [i] : [])).slice(0, limit);
  const own = useCornerSketch(drawn ? draws : null, places, printing);
  const laid = useMemo(() => {
    if (!overlay) return null;
    const places = overlay.draws.flatMap((each, i) => (each ? [i] : []));
    return { places, draws: places.map((i) => overlay.draws[i] ?? []) };
  }, [overlay]);
  // Where nothing is laid over, or nothing of what is shown, there is nothing to sketch.
  const laidShown = (own?.sketch.shown ?? []).flatMap((i) => {
    const at = laid?.places.indexOf(i) ?? -1;
    return at < 0 ? [] : [at];
  });
  const over = useCornerSketch(drawn && laidShown.length ? (laid?.draws ?? null) : null, laidShown, printing);

  function choose(name: string, on: boolean) {
    setChosen(on ? [...chosen, name] : chosen.filter((other) => other !== name));
  }

  const count = own?.sketch.shown.length ?? places.length;
  return (
    <Figure
      {...props}
      height={cornerHeight(count, { width: 720, narrow: false })}
      heightNarrow={cornerHeight(count, { width: 350, narrow: true })}
      numbers={() => cornerNumbers(parameters, draws)}
      above={
        <Choice
          parameters={parameters}
          shown={places.map((i) => parameters[i].name)}
          limit={limit}
          onChoose={choose}
          aside={aside}
        />
      }
    >
      {(size) =>
        own ? (
          <CornerDrawing
            {...panelsOf({ parameters, mcse, truth }, own, laid?.places ?? [], over)}
            size={size}
            overlay={over ? overlay?.label : undefined}
          />
        ) : null
      }
    </Figure>
  );
}

/** Panels of a finished sketch, with what belongs to their parameters. */
function panelsOf(
  { parameters, mcse, truth }: Pick<CornerFigureProps, 'parameters' | 'mcse' | 'truth'>,
  { sketch }: Sketched,
  laidPlaces: readonly number[],
  over: Sketched | null,
) {
  /** Row of a parameter among the panels of the samples laid over. */
  const rowOver = (i: number) => over?.sketch.shown.findIndex((at) => laidPlaces[at] === i) ?? -1;
  const shown = sketch.shown.flatMap((i, row): ShownParameter[] =>
    parameters[i]
      ? [
          {
            parameter: parameters[i],
            marginal: sketch.marginals[row],
            text: marginalText(sketch.marginals[row], mcse?.[i]),
            truth: truth?.[parameters[i].name] ?? null,
            over: over?.sketch.marginals[rowOver(i)] ?? null,
          },
        ]
      : [],
  );
  const jointOf = (row: number, column: number): ShownJoint => ({
    own: sketch.joints[row][column],
    over: over?.sketch.joints[rowOver(sketch.shown[row])]?.[rowOver(sketch.shown[column])] ?? null,
  });
  return { shown, jointOf };
}

function cornerNumbers(
  parameters: readonly CornerParameter[],
  draws: readonly ArrayLike<number>[],
): FigureNumbers {
  return {
    columns: ['parameter', 'median', 'q16', 'q84'],
    rows: parameters.map(({ name }, i) => {
      const { median, q16, q84 } = marginal(draws[i]);
      return [name, median, q16, q84];
    }),
  };
}

interface ChoiceProps {
  parameters: readonly CornerParameter[];
  shown: readonly string[];
  limit: number;
  onChoose: (name: string, on: boolean) => void;
  aside?: ReactNode;
}

/** Which parameters are shown. At the limit the others wait until one is taken out; one always stays. */
function Choice({ parameters, shown, limit, onChoose, aside }: ChoiceProps) {
  if (parameters.length < 2) return aside ? <div className="no-print mb-3">{aside}</div> : null;
  return (
    <div className="no-print mb-3 flex flex-wrap items-baseline gap-x-4">
      <fieldset className="flex flex-wrap items-baseline gap-x-3 border-0 p-0">
        <legend className="float-left mr-3 p-0 font-controls text-note text-ink-2">
          Shown, up to {limit === most.wide ? 'five' : 'three'}
        </legend>
        {parameters.map((parameter) => {
          const on = shown.includes(parameter.name);
          const fixed = on ? shown.length === 1 : shown.length >= limit;
          return (
            <label
              key={parameter.name}
              className={`inline-flex min-h-target items-center gap-[6px] text-[17px]/[21px] ${fixed && !on ? 'text-ink-3' : 'text-ink'}`}
            >
              <input
                type="checkbox"
                checked={on}
                disabled={fixed}
                aria-label={`${symbolName(parameter.symbol)}, ${parameter.label}`}
                onChange={(event) => onChoose(parameter.name, event.target.checked)}
                className="size-[13px] accent-action"
              />
              <Sym {...parameter.symbol} />
            </label>
          );
        })}
      </fieldset>
      {aside}
    </div>
  );
}
