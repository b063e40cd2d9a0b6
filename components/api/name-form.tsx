'use client';

import { useState } from 'react';
import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';
import { asRequestError, detailAt, type RequestError } from './request';
import { RequestMessage } from './request-message';

export interface NameFormProps {
  label: string;
  help: string;
  /** Words of its button. */
  act: string;
  primary?: boolean;
  /** Title of a refusal: "No group was created". */
  refused: string;
  /** Asks the API with the trimmed name; what it throws is said below the form. */
  onName: (name: string) => Promise<void>;
}

/** Makes something that needs a name and nothing else. */
export function NameForm({ label, help, act, primary = false, refused, onName }: NameFormProps) {
  const [name, setName] = useState('');
  const [error, setError] = useState<RequestError | null>(null);

  async function submit() {
    setError(null);
    try {
      await onName(name.trim());
      setName('');
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
  }

  return (
    <form
      noValidate
      className="mt-2 max-w-[460px]"
      onSubmit={(event) => {
        event.preventDefault();
        void submit();
      }}
    >
      <Field
        label={label}
        name="name"
        value={name}
        maxLength={120}
        autoComplete="off"
        onChange={(event) => setName(event.target.value)}
        error={detailAt(error, 'name')}
        help={help}
      />
      <Buttons>
        <Button
          type="submit"
          kind={primary ? 'primary' : 'default'}
          reason={name.trim() ? undefined : 'Give it a name first.'}
        >
          {act}
        </Button>
      </Buttons>
      <RequestMessage error={error} title={refused} shown={['name']} />
    </form>
  );
}
