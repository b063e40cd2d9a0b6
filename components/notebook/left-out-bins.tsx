'use client';

import { useState } from 'react';
import { Button, Buttons } from '@/components/ui/button';
import { Field, SelectField } from '@/components/ui/field';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import { plain } from '@/components/words/counts';
import type { Measurement, Notebook } from '@/lib/schemas';
import { keptRows } from './kept-points';

type Excluded = NonNullable<Notebook['cuts']['excluded']>;

/** As long as a reason may be; the server holds it. */
const longestReason = 200;

/** "0.012 to 0.015", or κ itself where there are no edges. */
function reachOf({ kappa, kappaLo, kappaHi }: Measurement['points'], bin: number): string {
  const i = bin - 1;
  return kappaLo && kappaHi ? `${plain(kappaLo[i], 3)} to ${plain(kappaHi[i], 3)}` : plain(kappa[i], 3);
}

export interface LeftOutBinsProps {
  points: Measurement['points'];
  cuts: Notebook['cuts'];
  onExcluded: (next: Excluded) => void;
  /** The bin that is about to be left out, chosen here or in the figure. */
  picked: number | null;
  onPicked: (bin: number | null) => void;
  error?: string;
}

/** Those left out, each with its reason and a way back. */
function LeftOutTable({
  points,
  cuts,
  onExcluded,
}: Pick<LeftOutBinsProps, 'points' | 'cuts' | 'onExcluded'>) {
  const excluded = cuts.excluded ?? [];
  if (excluded.length === 0) return null;
  return (
    <DataTable
      label="Bins left out"
      columns={[
        { key: 'bin', head: 'Bin', numeric: true },
        { key: 'kappa', head: 'κ', numeric: true },
        { key: 'reason', head: 'Why it is left out' },
        { key: 'back', head: '' },
      ]}
      rows={excluded.map(({ bin, reason }) => ({
        key: `${bin}`,
        cells: {
          bin,
          kappa: reachOf(points, bin),
          reason,
          back: (
            <WordButton
              of={`bin ${bin}`}
              onClick={() => onExcluded(excluded.filter((other) => other.bin !== bin))}
            >
              Put back
            </WordButton>
          ),
        },
      }))}
    />
  );
}

/** Leaving out single bins, each with the reason written beside it. */
export function LeftOutBins(props: LeftOutBinsProps) {
  const { points, cuts, onExcluded, picked, onPicked, error } = props;
  const [reason, setReason] = useState('');
  const excluded = cuts.excluded ?? [];
  const bins = keptRows(points, cuts).map((row) => row + 1);
  const chosen = picked !== null && bins.includes(picked) ? picked : null;
  const why = reason.trim();

  function leaveOut() {
    if (chosen === null || why === '') return;
    onExcluded([...excluded, { bin: chosen, reason: why }].sort((a, b) => a.bin - b.bin));
    onPicked(null);
    setReason('');
  }

  return (
    <div className="mt-3 max-w-figure">
      <LeftOutTable points={points} cuts={cuts} onExcluded={onExcluded} />
      <div className="mt-2 grid grid-cols-[232px_minmax(0,1fr)] gap-4 max-tablet:grid-cols-1 max-tablet:gap-2">
        <SelectField
          label="Leave out a bin"
          name="excludedBin"
          value={chosen ?? ''}
          options={[
            { value: '', label: 'none chosen' },
            ...bins.map((bin) => ({ value: `${bin}`, label: `bin ${bin}, κ ${reachOf(points, bin)}` })),
          ]}
          onChange={(event) => onPicked(event.target.value === '' ? null : Number(event.target.value))}
          error={error}
          help="Or click its point in the figure."
        />
        <Field
          label="Why it is left out"
          name="excludedReason"
          maxLength={longestReason}
          autoComplete="off"
          value={reason}
          onChange={(event) => setReason(event.target.value)}
          help="Stands in the caption, the revisions and the manifest of every fit."
        />
      </div>
      <Buttons>
        <Button
          onClick={leaveOut}
          reason={
            chosen === null
              ? 'Choose a bin first.'
              : why === ''
                ? 'Write the reason beside it first.'
                : undefined
          }
        >
          Leave it out
        </Button>
      </Buttons>
    </div>
  );
}
