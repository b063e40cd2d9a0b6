'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';

/** Creates a group and goes to it; its creator leads it. */
export function CreateGroupForm({ primary = false }: { primary?: boolean }) {
  const router = useRouter();
  const [name, setName] = useState('');
  const [error, setError] = useState<RequestError | null>(null);

  async function create() {
    setError(null);
    try {
      const { id } = await send<{ id: string }>('POST', '/api/v1/groups', { name: name.trim() });
      router.push(`/groups/${id}`);
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
  }

  return (
    <form
      noValidate
      className="max-w-[460px]"
      onSubmit={(event) => {
        event.preventDefault();
        void create();
      }}
    >
      <Field
        label="Name of the group"
        name="name"
        value={name}
        maxLength={120}
        autoComplete="off"
        onChange={(event) => setName(event.target.value)}
        error={detailAt(error, 'name')}
        help="You lead it; you can invite others once it is there."
      />
      <Buttons>
        <Button
          type="submit"
          kind={primary ? 'primary' : 'default'}
          reason={name.trim() ? undefined : 'Give it a name first.'}
        >
          Create the group
        </Button>
      </Buttons>
      <RequestMessage error={error} title="No group was created" shown={['name']} />
    </form>
  );
}
