'use client';

import { useState } from 'react';
import { detailAt } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { sectionNumber } from '@/components/notebook/sections';
import { Button, Buttons } from '@/components/ui/button';
import { NumberField } from '@/components/ui/number-field';
import { Sym } from '@/components/ui/sym';
import { plain } from '@/components/words/counts';
import { formatCount } from '@/lib/figures/format';
import type { ScanRange } from '@/lib/inference/scan/scan-range';
import type { StartScan } from '@/lib/schemas';
import { probability } from './scan-words';
import type { ScanHandle } from './use-scans';

/** As many nulls as the API takes unless told. */
const usualNulls = 20_000;

/** From where to where, with how many nulls; the defaults follow the priors until they are written over. */
export function ScanForm({
  handle,
  range,
  planned,
  reason,
}: {
  handle: Pick<ScanHandle, 'start' | 'starting' | 'error'>;
  range: ScanRange | null;
  /** What a scan will be of: one field, or two together. */
  planned: 'one' | 'two';
  reason?: string;
}) {
  const [written, setWritten] = useState<{ muMin?: number | null; muMax?: number | null }>({});
  const [nulls, setNulls] = useState<number | null>(usualNulls);
  const from = range && Number.isFinite(range.lo) ? Number(range.lo.toPrecision(6)) : null;
  const to = range && Number.isFinite(range.hi) ? Number(range.hi.toPrecision(6)) : null;
  const muMin = written.muMin === undefined ? from : written.muMin;
  const muMax = written.muMax === undefined ? to : written.muMax;
  const missing = muMin === null || muMax === null || nulls === null;
  const { error, starting } = handle;

  function start() {
    if (muMin === null || muMax === null || nulls === null) return;
    // Ends that were left alone are the server's own, to the last digit.
    const body: StartScan = {
      ...(written.muMin === undefined ? {} : { muMin }),
      ...(written.muMax === undefined ? {} : { muMax }),
      nulls,
    };
    void handle.start(body);
  }

  return (
    <form
      noValidate
      className="no-print"
      onSubmit={(event) => {
        event.preventDefault();
        if (!reason && !missing && !starting) start();
      }}
    >
      <div className="grid max-w-figure grid-cols-3 gap-x-4 gap-y-2 max-tablet:grid-cols-1">
        <NumberField
          label={
            <>
              From <Sym base="μ" />
            </>
          }
          name="muMin"
          value={muMin}
          onValue={(value) => setWritten({ ...written, muMin: value })}
          error={detailAt(error, 'muMin')}
          help={
            from === null
              ? 'The masses are fixed: say where to begin.'
              : `The priors of the masses begin at ${plain(from, 3)}.`
          }
        />
        <NumberField
          label={
            <>
              To <Sym base="μ" />
            </>
          }
          name="muMax"
          value={muMax}
          onValue={(value) => setWritten({ ...written, muMax: value })}
          error={detailAt(error, 'muMax')}
          help={
            to === null
              ? 'The masses are fixed: say where to end.'
              : `They end at ${plain(to, 3)}. A wider range finds more by chance.`
          }
        />
        <NumberField
          integer
          decimals={0}
          label="Nulls"
          name="nulls"
          value={nulls}
          onValue={setNulls}
          error={detailAt(error, 'nulls')}
          help={
            nulls && nulls > 0
              ? `Simulated without a signal. ${formatCount(nulls)} tell p down to ${probability(1 / (nulls + 1))}.`
              : 'Simulated without a signal.'
          }
        />
      </div>
      <Buttons
        note={
          reason
            ? undefined
            : planned === 'two'
              ? 'One field first, then two together. Each scan is logged as a look.'
              : 'Each scan is logged as a look, whatever it finds.'
        }
      >
        <Button
          type="submit"
          busy={starting ? 'Scanning' : undefined}
          reason={reason ?? (missing ? 'Fill in the numbers first.' : undefined)}
        >
          Scan
        </Button>
      </Buttons>
      <RequestMessage
        error={error}
        title={`Section ${sectionNumber('scan')} was not scanned`}
        shown={['muMin', 'muMax', 'nulls']}
      />
    </form>
  );
}
