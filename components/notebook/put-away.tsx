'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { Button, Buttons } from '@/components/ui/button';
import type { Notebook } from '@/lib/schemas';
import type { NotebookState } from './use-notebook';

type Act = 'archive' | 'unarchive' | 'delete';

/** Puts a notebook away, takes it back, or deletes one in which nothing was tried. */
export function PutAway({ state, onDone }: { state: NotebookState; onDone: () => void }) {
  const { notebook } = state;
  const router = useRouter();
  const [asked, setAsked] = useState<Act | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const path = `/api/v1/notebooks/${notebook.id}`;
  const fits = notebook.fits.length;

  async function act(what: Act) {
    setError(null);
    setAsked(null);
    try {
      if (what === 'delete') {
        await send('DELETE', path);
        router.push(`/groups/${notebook.groupId}`);
        return;
      }
      await state.put(await send<Notebook>('POST', `${path}/${what}`));
      onDone();
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
  }

  if (notebook.archived) {
    return (
      <>
        <Buttons>
          <Button onClick={() => void act('unarchive')}>Take it back into use</Button>
        </Buttons>
        <RequestMessage error={error} title="It stays archived" />
      </>
    );
  }
  return (
    <div className="mb-4 border-t border-hairline pt-2">
      {asked === 'delete' ? (
        <Asking
          question={`Delete “${notebook.title}” with its ${notebook.revision === 1 ? 'one revision' : `${notebook.revision} revisions`}? It can’t be brought back.`}
          act="Delete it"
          keep="Keep it"
          onAct={() => void act('delete')}
          onKeep={() => setAsked(null)}
        />
      ) : (
        <>
          <p>
            Archived, the notebook leaves the list and can’t be changed; it can be read, copied and taken
            back.
            {fits
              ? ' It can’t be deleted: what was tried in it counts when a significance is judged.'
              : ' Nothing was fitted in it, so it can also be deleted.'}
          </p>
          <Buttons>
            <Button onClick={() => void act('archive')}>Archive it</Button>
            {fits || !notebook.may.includes('notebook.delete') ? null : (
              <Button onClick={() => setAsked('delete')}>Delete it</Button>
            )}
            <Button onClick={onDone}>Leave it</Button>
          </Buttons>
        </>
      )}
      <RequestMessage error={error} title="The notebook stays as it is" />
    </div>
  );
}
