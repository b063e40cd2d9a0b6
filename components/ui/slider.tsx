'use client';

import { useId, type KeyboardEvent, type ReactNode } from 'react';
import { decimalsForSpan } from '@/lib/figures/format';
import { markerPath } from '@/lib/figures/paths';
import { NumberField } from './number-field';
import { Sym } from './sym';

/** Rows of sliders share their columns: symbol and words, track, number, prior. */
export function Sliders({ children }: { children: ReactNode }) {
  return (
    <div className="no-print mt-2 grid max-w-figure grid-cols-[auto_minmax(120px,1fr)_76px_auto] items-center gap-x-2 max-tablet:grid-cols-[1fr_76px]">
      {children}
    </div>
  );
}

export interface SliderProps {
  symbol: { base: string; sub: string };
  /** In words: "mass 1". */
  label: string;
  /** 0-based field whose marker and colour the thumb takes; null for what belongs to no field. */
  field?: number | null;
  lo: number;
  hi: number;
  /** Step of the arrow keys; Page keys move by ten. */
  step: number;
  value: number;
  onValue: (value: number) => void;
  decimals?: number;
  /** "uniform 1 to 12" */
  prior?: string;
  disabled?: boolean;
}

const colours = ['stroke-field-1', 'stroke-field-2', 'stroke-field-3', 'stroke-field-4'];

/** Onto the grid of steps that starts at `lo`, and inside the ends. */
function settle(value: number, { lo, hi, step }: Pick<SliderProps, 'lo' | 'hi' | 'step'>): number {
  const onStep = lo + Math.round((value - lo) / step) * step;
  return Math.min(hi, Math.max(lo, Number(onStep.toPrecision(12))));
}

export function Slider(props: SliderProps) {
  const { symbol, label, field = null, lo, hi, step, value, onValue, prior, disabled } = props;
  const id = useId();
  const decimals = props.decimals ?? decimalsForSpan(lo, hi);
  const inside = Math.min(hi, Math.max(lo, value));
  const share = hi > lo ? (inside - lo) / (hi - lo) : 0;

  /** Browsers disagree on the size of a page; here it is ten steps. */
  function onKeyDown(event: KeyboardEvent) {
    const moves: Record<string, number> = { PageUp: 10, PageDown: -10 };
    const move = moves[event.key];
    if (move === undefined) return;
    event.preventDefault();
    onValue(settle(value + move * step, props));
  }

  return (
    <div className="contents max-tablet:col-span-full max-tablet:grid max-tablet:grid-cols-[1fr_76px] max-tablet:items-center">
      <label
        htmlFor={id}
        className="flex h-[35px] min-w-[132px] items-center gap-[10px] font-words text-[17px]/[28px] text-ink"
      >
        <Sym {...symbol} />
        <small className="font-controls text-note text-ink-2">{label}</small>
      </label>
      <span className="relative flex h-[35px] items-center max-tablet:order-3 max-tablet:col-span-full max-tablet:mb-1 max-tablet:h-[36px]">
        <input
          id={id}
          type="range"
          className="slider peer"
          min={lo}
          max={hi}
          step={step}
          value={inside}
          disabled={disabled}
          aria-label={label}
          onKeyDown={onKeyDown}
          onChange={(event) => onValue(Number(event.target.value))}
        />
        <span className="pointer-events-none absolute inset-x-0 top-1/2 h-px bg-rule" />
        <svg
          width="25"
          height="25"
          viewBox="-12.5 -12.5 25 25"
          aria-hidden="true"
          className={`pointer-events-none absolute top-1/2 -mt-[12.5px] -ml-[12.5px] fill-paper [stroke-width:2] outline-offset-0 peer-focus-visible:[&>.ring]:stroke-action ${field === null ? 'stroke-ink' : colours[field % 4]}`}
          style={{ left: `calc(7.5px + ${Number(share.toFixed(5))} * (100% - 15px))` }}
        >
          <path className="ring fill-none stroke-transparent" d={markerPath(field ?? 0, 0, 0, 11.5)} />
          <path d={markerPath(field ?? 0, 0, 0, 6.5)} />
        </svg>
      </span>
      <span className="flex h-[35px] items-center max-tablet:col-start-2 max-tablet:row-start-1">
        <NumberField
          hiddenLabel={`${label}, value`}
          value={value}
          decimals={decimals}
          width={72}
          disabled={disabled}
          onValue={(next) => {
            if (next !== null && next >= lo && next <= hi) onValue(next);
          }}
        />
      </span>
      <span className="flex h-[35px] min-w-[124px] items-center justify-end font-controls text-note text-ink-2 max-tablet:hidden">
        {prior}
      </span>
    </div>
  );
}
