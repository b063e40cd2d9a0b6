import { SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { useState } from 'react';
import { binWeightLabels } from './option-words';

export interface BinWeightFieldProps {
  name: string;
  label: string;
  /** The power q of κ^q. */
  value: number;
  error?: string;
  onValue: (value: number) => void;
}

/** What a bin's mean weights by: the powers of usual countings by their meaning, or a power of one's own. */
export function BinWeightField({ name, label, value, error, onValue }: BinWeightFieldProps) {
  const [own, setOwn] = useState(false);
  const usual = String(value) in binWeightLabels;
  const open = own || !usual;
  return (
    <>
      <SelectField
        label={label}
        name={name}
        value={open ? 'own' : String(value)}
        options={[
          ...Object.entries(binWeightLabels).map(([power, words]) => ({ value: power, label: words })),
          { value: 'own', label: 'another power' },
        ]}
        error={open ? undefined : error}
        help="A bin stands for the mean of S with weight κ^q in ln κ. Take the power by which its triangles were counted."
        onChange={({ target }) => {
          setOwn(target.value === 'own');
          if (target.value !== 'own') onValue(Number(target.value));
        }}
      />
      {open ? (
        <NumberField
          label="Power q of the weight"
          name={`${name}-power`}
          value={value}
          error={error}
          help="From −10 to 10; it need not be whole."
          onValue={(next) => {
            if (next !== null) onValue(next);
          }}
        />
      ) : null}
    </>
  );
}
