'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field, TextField } from '@/components/ui/field';
import { Message } from '@/components/ui/message';
import type { Measurement } from '@/lib/schemas';

/** Name and description, changed in place. */
export function DescribeForm({
  measurement,
  onSaved,
  onCancel,
}: {
  measurement: Measurement;
  onSaved: () => void;
  onCancel: () => void;
}) {
  const [name, setName] = useState(measurement.name);
  const [description, setDescription] = useState(measurement.description);
  const [error, setError] = useState<RequestError | null>(null);
  const [busy, setBusy] = useState(false);

  async function save() {
    setBusy(true);
    setError(null);
    try {
      await send<Measurement>('PATCH', `/api/v1/measurements/${measurement.id}`, { name, description });
      onSaved();
    } catch (thrown) {
      setError(asRequestError(thrown));
      setBusy(false);
    }
  }

  const reason = busy ? 'It is being saved.' : name.trim() === '' ? 'Give it a name first.' : undefined;
  return (
    <form
      noValidate
      className="max-w-caption"
      onSubmit={(event) => {
        event.preventDefault();
        if (!reason) void save();
      }}
    >
      <Field
        label="Name"
        name="name"
        maxLength={120}
        autoComplete="off"
        autoFocus
        value={name}
        onChange={(event) => setName(event.target.value)}
        error={detailAt(error, 'name')}
        help="All versions go by it."
      />
      <div className="mt-2">
        <TextField
          label="Description"
          name="description"
          maxLength={2000}
          value={description}
          onChange={(event) => setDescription(event.target.value)}
          error={detailAt(error, 'description')}
        />
      </div>
      <Buttons>
        <Button type="submit" reason={reason}>
          Save name and description
        </Button>
        <Button onClick={onCancel}>Leave them as they are</Button>
      </Buttons>
      <RequestMessage error={error} title="Nothing was changed" shown={['name', 'description']} />
    </form>
  );
}

/** What stands against deleting it, in words; null where nothing does. */
function againstDeleting({ resting, versions }: Measurement): string | null {
  const fits = versions.reduce((sum, line) => sum + line.fits, 0);
  if (resting.length) {
    const names = resting.map(({ number }) => number).join(', ');
    return `${resting.length === 1 ? `Notebook ${names} rests` : `Notebooks ${names} rest`} on it.`;
  }
  return fits ? 'Fits were made on it.' : null;
}

/** Deleting the whole, or the newest version alone; asked once more in a sentence that names it. */
export function DeleteBody({ measurement }: { measurement: Measurement }) {
  const router = useRouter();
  const [asked, setAsked] = useState<'all' | 'version' | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const { id, groupId, name, newest, versions, resting } = measurement;
  const against = againstDeleting(measurement);
  const line = versions.find(({ version }) => version === newest);
  const versionAgainst =
    line && (line.fits > 0 || resting.some(({ version }) => version === newest))
      ? `A notebook or fit rests on version ${newest}.`
      : undefined;

  async function remove(what: 'all' | 'version') {
    setError(null);
    try {
      const path = `/api/v1/measurements/${id}${what === 'all' ? '' : `/versions/${newest}`}`;
      await send('DELETE', path);
      if (what === 'all') router.push(`/groups/${groupId}/measurements`);
      else {
        router.replace(`/measurements/${id}`);
        router.refresh();
      }
    } catch (thrown) {
      setError(asRequestError(thrown));
      setAsked(null);
    }
  }

  return (
    <>
      <p>
        Only what nothing rests on can be deleted. Its files go with it, and the log keeps that it was there.
      </p>
      {asked ? (
        <Message
          level="warning"
          title={
            asked === 'all' ? `Delete ${name} with all versions?` : `Delete version ${newest} of ${name}?`
          }
        >
          <p>It can’t be taken back.</p>
          <Buttons>
            <Button onClick={() => void remove(asked)}>
              {asked === 'all' ? 'Delete the measurement' : `Delete version ${newest}`}
            </Button>
            <Button onClick={() => setAsked(null)}>Keep it</Button>
          </Buttons>
        </Message>
      ) : (
        <>
          <Buttons>
            <Button onClick={() => setAsked('all')} reason={against ?? undefined}>
              Delete this measurement …
            </Button>
          </Buttons>
          {versions.length > 1 ? (
            <Buttons>
              <Button onClick={() => setAsked('version')} reason={versionAgainst}>
                Delete version {newest} alone …
              </Button>
            </Buttons>
          ) : null}
        </>
      )}
      <RequestMessage error={error} title="Nothing was deleted" />
    </>
  );
}
