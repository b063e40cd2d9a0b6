'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import { quantitiesOf } from '@/components/fit/quantities';
import { labelsOfFit } from '@/components/notebook/fit-measurements';
import { Button } from '@/components/ui/button';
import { SelectField } from '@/components/ui/field';
import type { Fit, Notebook } from '@/lib/schemas';
import {
  facts,
  factWords,
  statistics,
  statisticWords,
  writeReference,
  type Fact,
  type Statistic,
} from '@/lib/statement/reference';

const isFact = (what: string): what is Fact => facts.some((fact) => fact === what);
const asItIs = [{ value: 'fact', label: 'as it is' }];

/** Chooses a number of a fit; what is inserted is its reference, never the number itself. */
export function ReferenceMenu({
  notebook,
  onInsert,
}: {
  notebook: Notebook;
  onInsert: (reference: string) => void;
}) {
  const fits = [...notebook.fits].sort((a, b) => b.number - a.number);
  const [chosen, setChosen] = useState(fits[0]?.id);
  const [what, setWhat] = useState<string | null>(null);
  const [given, setGiven] = useState<Statistic>('summary');
  const { data: fit } = useSWR(chosen ? `/api/v1/fits/${chosen}` : null, read<Fit>, {
    revalidateOnFocus: false,
  });
  if (!fits.length) {
    return (
      <p className="mb-0 font-controls text-note text-ink-2">
        There is no fit yet whose numbers the words could refer to.
      </p>
    );
  }
  const quantities = fit ? [...quantitiesOf(fit.snapshot.template, labelsOfFit(fit, notebook)).values()] : [];
  const options = [
    ...quantities.map(({ name, symbol, label }) => ({
      value: name,
      label: `${symbol.base}${symbol.sub}, ${label}`,
    })),
    ...facts.map((fact) => ({ value: fact, label: factWords[fact] })),
  ];
  const shown = options.find(({ value }) => value === what)?.value ?? options[0].value;
  const number = fits.find(({ id }) => id === chosen)?.number;

  function insert() {
    if (number === undefined) return;
    onInsert(
      writeReference(
        isFact(shown)
          ? { kind: 'fact', fact: shown, fit: number }
          : { kind: 'marginal', statistic: given, quantity: shown, fit: number },
      ),
    );
  }

  return (
    <div
      role="group"
      aria-label="Insert a number"
      className="grid grid-cols-[112px_minmax(0,1fr)_minmax(0,1fr)_auto] items-end gap-x-3 gap-y-2 max-tablet:grid-cols-1"
    >
      <SelectField
        label="Number of"
        name="statement-fit"
        value={chosen}
        options={fits.map(({ id, number: each }) => ({ value: id, label: `fit ${each}` }))}
        onChange={(event) => setChosen(event.target.value)}
      />
      <SelectField
        label="What"
        name="statement-what"
        value={shown}
        options={options}
        onChange={(event) => setWhat(event.target.value)}
      />
      <SelectField
        label="Given as"
        name="statement-given"
        value={isFact(shown) ? 'fact' : given}
        options={
          isFact(shown)
            ? asItIs
            : statistics.map((statistic) => ({ value: statistic, label: statisticWords[statistic] }))
        }
        onChange={(event) => setGiven(event.target.value as Statistic)}
        disabled={isFact(shown)}
      />
      <div>
        <Button onClick={insert}>Insert</Button>
      </div>
    </div>
  );
}
