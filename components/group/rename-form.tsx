'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';
import type { Group } from '@/lib/schemas';

/** Gives the group another name. */
export function RenameForm({ group, onChanged }: { group: Group; onChanged: () => Promise<unknown> }) {
  const router = useRouter();
  const [name, setName] = useState(group.name);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');

  async function rename() {
    if (busy || name.trim() === group.name) return;
    setBusy(true);
    setError(null);
    setSaid('');
    try {
      await send('PATCH', `/api/v1/groups/${group.id}`, { name: name.trim() });
      await onChanged();
      setSaid('The group has its new name.');
      // The name stands in the running head and the title too, which the server draws.
      router.refresh();
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
    setBusy(false);
  }

  return (
    <form
      noValidate
      className="border-t border-ink pt-2"
      onSubmit={(event) => {
        event.preventDefault();
        void rename();
      }}
    >
      <div className="max-w-[460px]">
        <Field
          label="Name of the group"
          name="name"
          value={name}
          maxLength={120}
          autoComplete="off"
          onChange={(event) => setName(event.target.value)}
          error={detailAt(error, 'name') && 'Give a name of one to 120 characters.'}
          help="Addresses and the record stay as they are; the log keeps the old name."
        />
      </div>
      <Buttons note={<span role="status">{said}</span>}>
        <Button type="submit" busy={busy ? 'Renaming …' : undefined}>
          Rename the group
        </Button>
      </Buttons>
      <RequestMessage error={error} title="The group keeps its name" shown={['name']} />
    </form>
  );
}
