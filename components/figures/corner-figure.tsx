'use client';

import { useMemo, useState } from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';
import { marginal, marginalText, type Marginal } from '@/lib/figures/corner';
import { Sym, symbolName } from '../ui/sym';
import { CornerDrawing, cornerHeight } from './corner-drawing';
import { Figure, useNarrow, type FigureFacts } from './figure';

export interface CornerParameter {
  name: string;
  symbol: { base: string; sub: string };
  /** In words: "mass 1". */
  label: string;
  /** 0-based field whose colour and dash the density takes; null for ink. */
  field: number | null;
}

export interface CornerFigureProps extends FigureFacts {
  parameters: readonly CornerParameter[];
  /** Kept draws of all replicas, one array a parameter, in the order of `parameters`. */
  draws: readonly ArrayLike<number>[];
  /** Names of those shown at first; left out, the first five. */
  initial?: readonly string[];
  /** Monte Carlo standard error of each median; it sets the digits above the diagonal. */
  mcse?: readonly number[];
}

/** As many as a screen can carry. */
const most = { wide: 5, narrow: 3 };

/** Densities and joint regions of up to five parameters, chosen by the reader. */
export function CornerFigure(props: CornerFigureProps) {
  const { parameters, draws, initial, mcse } = props;
  const narrow = useNarrow();
  const [chosen, setChosen] = useState(
    () => initial?.slice(0, most.wide) ?? parameters.slice(0, most.wide).map((p) => p.name),
  );
  const limit = narrow ? most.narrow : most.wide;
  const marginals = useMemo(() => draws.map((d) => marginal(d)), [draws]);
  const shown = parameters
    .map((parameter, i) => ({
      parameter,
      marginal: marginals[i],
      text: marginalText(marginals[i], mcse?.[i]),
    }))
    .filter(({ parameter }) => chosen.includes(parameter.name))
    .slice(0, limit);

  function choose(name: string, on: boolean) {
    setChosen(on ? [...chosen, name] : chosen.filter((other) => other !== name));
  }

  return (
    <Figure
      {...props}
      height={cornerHeight(shown.length, { width: 720, narrow: false })}
      heightNarrow={cornerHeight(shown.length, { width: 350, narrow: true })}
      numbers={() => cornerNumbers(parameters, marginals)}
      above={
        <Choice
          parameters={parameters}
          shown={shown.map((s) => s.parameter.name)}
          limit={limit}
          onChoose={choose}
        />
      }
    >
      {(size) => <CornerDrawing shown={shown} size={size} />}
    </Figure>
  );
}

function cornerNumbers(
  parameters: readonly CornerParameter[],
  marginals: readonly Marginal[],
): FigureNumbers {
  return {
    columns: ['parameter', 'median', 'q16', 'q84'],
    rows: parameters.map((p, i) => [p.name, marginals[i].median, marginals[i].q16, marginals[i].q84]),
  };
}

interface ChoiceProps {
  parameters: readonly CornerParameter[];
  shown: readonly string[];
  limit: number;
  onChoose: (name: string, on: boolean) => void;
}

/** Which parameters are shown. At the limit the others wait until one is taken out; one always stays. */
function Choice({ parameters, shown, limit, onChoose }: ChoiceProps) {
  if (parameters.length < 2) return null;
  return (
    <fieldset className="no-print mb-3 flex flex-wrap items-baseline gap-x-3 border-0 p-0">
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
  );
}
