'use client';

import { useState } from 'react';
import { detailAt } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { NumberField } from '@/components/ui/number-field';
import type { ChecksHandle } from './use-checks';

/** As the API takes them unless told. */
const usual = { datasets: 200, draws: 99, seed: 1 };

/** How many data sets, draws of each, and the seed. */
export function CheckForm({
  handle: { start, busy, error },
  reason,
}: {
  handle: Pick<ChecksHandle, 'start' | 'busy' | 'error'>;
  reason?: string;
}) {
  const [datasets, setDatasets] = useState<number | null>(usual.datasets);
  const [draws, setDraws] = useState<number | null>(usual.draws);
  const [seed, setSeed] = useState<number | null>(usual.seed);
  const missing = datasets === null || draws === null || seed === null;
  return (
    <form
      noValidate
      className="no-print"
      onSubmit={(event) => {
        event.preventDefault();
        if (!reason && !missing && !busy) void start({ datasets, draws, seed });
      }}
    >
      <div className="grid max-w-figure grid-cols-3 gap-x-4 gap-y-2 max-tablet:grid-cols-1">
        <NumberField
          integer
          decimals={0}
          label="Simulated data sets"
          name="datasets"
          value={datasets}
          onValue={setDatasets}
          error={detailAt(error, 'datasets')}
          help="50 to 1000. More of them tell smaller faults."
        />
        <NumberField
          integer
          decimals={0}
          label="Draws of each posterior"
          name="draws"
          value={draws}
          onValue={setDraws}
          error={detailAt(error, 'draws')}
          help="One less than a multiple of 20."
        />
        <NumberField
          integer
          decimals={0}
          label="Seed"
          name="seed"
          value={seed}
          onValue={setSeed}
          error={detailAt(error, 'seed')}
          help="The same seed gives the same ranks."
        />
      </div>
      <Buttons
        note={reason ? undefined : 'Takes its turn among the group’s fits, and a few minutes as a rule.'}
      >
        <Button
          type="submit"
          busy={busy === 'starting' ? 'Starting' : undefined}
          reason={reason ?? (missing ? 'Fill in the numbers first.' : undefined)}
        >
          Check the calibration
        </Button>
      </Buttons>
      <RequestMessage
        error={error}
        title="The calibration is not being checked"
        shown={['datasets', 'draws', 'seed']}
      />
    </form>
  );
}
