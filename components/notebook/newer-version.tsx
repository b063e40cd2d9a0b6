'use client';

import Link from 'next/link';
import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Message } from '@/components/ui/message';
import { capital, counted } from '@/components/words/counts';
import type { TakenUp } from '@/lib/schemas';
import type { NotebookState } from './use-notebook';

/** What came of taking a version up: how many fits were queued, and which could not be. */
function Outcome({ taken }: { taken: TakenUp }) {
  const { version, revision, fits, skipped, dropped } = taken;
  return (
    <Message level="warning" title={`Version ${version} is taken up as revision ${revision}`}>
      <p>
        {fits.length
          ? `${capital(counted(fits.length, 'fit'))} ${fits.length === 1 ? 'repeats' : 'repeat'} what had finished before. How the results move stands at the end of this notebook.`
          : 'No fit had finished before, so none is repeated.'}
      </p>
      {dropped.length ? (
        <p>
          Version {version} has no bins with the edges of those left out before, which are dropped:{' '}
          {dropped.map(({ bin, reason }) => `${bin} (${reason})`).join(', ')}.
        </p>
      ) : null}
      {skipped.map(({ number, reason }) => (
        <p key={number}>
          Fit {number} is not repeated. {reason}
        </p>
      ))}
    </Message>
  );
}

/** Says that the notebook rests on an older version, and moves it in one command. */
export function NewerVersion({ state }: { state: NotebookState }) {
  const { notebook } = state;
  const { id, name, version, newest } = notebook.measurement;
  const [taken, setTaken] = useState<TakenUp | null>(null);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);

  async function takeUp() {
    setBusy(true);
    setError(null);
    try {
      const body = { version: newest };
      setTaken(await send<TakenUp>('POST', `/api/v1/notebooks/${notebook.id}/take-up`, body));
      await state.refresh();
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setBusy(false);
    }
  }

  if (newest <= version) return taken ? <Outcome taken={taken} /> : null;
  const allowed = notebook.may.includes('notebook.edit') && notebook.may.includes('fit.start');
  return (
    <Message level="warning" quiet title="A newer version exists">
      <p>
        This notebook rests on version {version} of {name}, and draws its figures from it.{' '}
        <Link href={`/measurements/${id}#versions`}>What version {newest} changed</Link> stands beside the
        measurement.
      </p>
      {allowed ? (
        <>
          <Buttons>
            <Button onClick={() => void takeUp()} reason={busy ? 'The fits are being queued.' : undefined}>
              Take up version {newest} and run all fits again
            </Button>
          </Buttons>
          <p className="text-small text-ink-2">
            It becomes a new revision. Each finished fit is repeated with its own settings and seed; the old
            fits stay, marked as of an earlier revision.
          </p>
        </>
      ) : null}
      <RequestMessage error={error} title={`Version ${newest} was not taken up`} />
    </Message>
  );
}
