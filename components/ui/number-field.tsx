'use client';

import { useState, type ReactNode } from 'react';
import { formatNumber, parseNumber } from '@/lib/figures/format';
import { Labelled, lineLook } from './field';

export interface NumberFieldProps {
  label?: ReactNode;
  hiddenLabel?: string;
  value: number | null;
  /** Called with null for an empty field and for what isn't a number. */
  onValue: (value: number | null) => void;
  /** Whole numbers only. */
  integer?: boolean;
  /** Decimals shown while the field isn't being written in; left out, as many as the number has. */
  decimals?: number;
  help?: ReactNode;
  error?: ReactNode;
  /** The fault is told elsewhere in the same row: only the line shows it here. */
  invalid?: boolean;
  name?: string;
  id?: string;
  /** Width in pixels; left out, the whole column. */
  width?: number;
  disabled?: boolean;
}

function shown(value: number | null, decimals?: number): string {
  if (value === null || !Number.isFinite(value)) return '';
  if (decimals !== undefined) return formatNumber(value, decimals);
  return String(value).replace('-', '−');
}

/** A number in the monospaced face, right-aligned; both minus signs are read. */
export function NumberField(props: NumberFieldProps) {
  const { label, hiddenLabel, value, onValue, integer, decimals, help, error, name, id, width, disabled } =
    props;
  const [draft, setDraft] = useState<string | null>(null);
  const text = draft ?? shown(value, decimals);
  const read = parseNumber(text);
  const faulty = text.trim() !== '' && (read === null || (integer === true && !Number.isInteger(read)));
  const remedy = integer ? 'Give a whole number.' : 'Give a number.';
  return (
    <Labelled
      label={label}
      hiddenLabel={hiddenLabel}
      help={help}
      error={error ?? (faulty ? remedy : undefined)}
      invalid={props.invalid}
      id={id}
    >
      {(described) => (
        <input
          {...described}
          type="text"
          inputMode={integer ? 'numeric' : 'decimal'}
          name={name}
          disabled={disabled}
          autoComplete="off"
          value={text}
          onChange={(event) => {
            const next = event.target.value;
            const number = parseNumber(next);
            setDraft(next);
            onValue(number !== null && integer && !Number.isInteger(number) ? null : number);
          }}
          onBlur={() => {
            if (!faulty) setDraft(null);
          }}
          style={width ? { width } : undefined}
          className={`${lineLook} text-right font-numbers text-number`}
        />
      )}
    </Labelled>
  );
}
