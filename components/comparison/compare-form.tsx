'use client';

import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { CheckField } from '@/components/ui/field';
import { capital, inWords, listed } from '@/components/words/counts';
import type { ComparisonStarted } from '@/lib/schemas';
import { defaultFieldCounts, mostFields } from '@/lib/schemas/field-counts';
import { fieldsInWords } from './comparison-words';

const more = Array.from({ length: mostFields + 1 }, (_, n) => n).filter(
  (n) => !defaultFieldCounts.includes(n),
);

/** "Fits 3 and 4 were queued; fit 2 was there already." */
function startedInWords({ fits, skipped }: ComparisonStarted): string {
  const numbers = (reused: boolean) =>
    fits
      .filter((fit) => fit.reused === reused)
      .map(({ number }) => number)
      .sort((a, b) => a - b)
      .map(String);
  const name = (of: string[]) => `${of.length === 1 ? 'fit' : 'fits'} ${listed(of)}`;
  const were = (of: string[]) => (of.length === 1 ? 'was' : 'were');
  const [queued, there] = [numbers(false), numbers(true)];
  const said = [
    ...(queued.length ? [`${name(queued)} ${were(queued)} queued`] : []),
    ...(there.length ? [`${name(there)} ${were(there)} there already`] : []),
    ...skipped.map(
      ({ fields, reason }) => `${fieldsInWords(fields)} can’t be fitted: ${reason.replace(/\.$/, '')}`,
    ),
  ];
  return `${capital(said.join('; '))}.`;
}

/** The one command: fits that differ in the number of fields alone. */
export function CompareForm({
  notebookId,
  reason,
  onStarted,
}: {
  notebookId: string;
  reason?: string;
  onStarted: () => Promise<unknown> | unknown;
}) {
  const [further, setFurther] = useState<readonly number[]>([]);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');

  async function compare() {
    setBusy(true);
    setError(null);
    setSaid('');
    const fields = [...defaultFieldCounts, ...further];
    try {
      const started = await send<ComparisonStarted>('POST', `/api/v1/notebooks/${notebookId}/comparisons`, {
        fields,
      });
      setSaid(startedInWords(started));
      await onStarted();
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setBusy(false);
    }
  }

  return (
    <div className="no-print">
      <div className="flex flex-wrap gap-x-4">
        {more.map((n) => (
          <CheckField
            key={n}
            label={`${inWords(n)} fields too`}
            name={`fields${n}`}
            checked={further.includes(n)}
            onChange={(event) =>
              setFurther(event.target.checked ? [...further, n] : further.filter((each) => each !== n))
            }
          />
        ))}
      </div>
      <Buttons note={reason ? undefined : 'Queues a fit for each number that has none yet.'}>
        <Button
          reason={reason}
          busy={busy ? 'Queueing the fits …' : undefined}
          onClick={() => void compare()}
        >
          Compare the number of fields
        </Button>
      </Buttons>
      <p role="status" className="mb-0 min-h-[21px] text-small text-ink-2">
        {said}
      </p>
      <RequestMessage error={error} title="The fits were not started" />
    </div>
  );
}
