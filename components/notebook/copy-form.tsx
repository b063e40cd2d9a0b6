'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, detailAt, read, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field, SelectField } from '@/components/ui/field';
import type { CopyNotebook, Fit, Group, Measurement, Notebook, NotebookCreated } from '@/lib/schemas';

export interface CopyFormProps {
  notebook: Notebook;
  measurement: Measurement;
  /** The fit that the page shows: what it froze can be copied too. */
  fit: Fit | null;
  onDone: () => void;
}

/** Opens a copy of a notebook: under which title, on which measurement, with which settings. */
export function CopyForm({ notebook, measurement, fit, onDone }: CopyFormProps) {
  const router = useRouter();
  const [title, setTitle] = useState(`${notebook.title.slice(0, 153)} (copy)`);
  const [target, setTarget] = useState('');
  const [from, setFrom] = useState('');
  const [copying, setCopying] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const { data: group } = useSWR(`/api/v1/groups/${notebook.groupId}`, read<Group>, {
    revalidateOnFocus: false,
  });
  const others = (group?.measurements ?? []).filter(({ id }) => id !== measurement.id);

  async function copy() {
    setError(null);
    setCopying(true);
    const body: CopyNotebook = {
      title: title.trim(),
      ...(target ? { measurement: target } : {}),
      ...(from ? { fit: from } : {}),
    };
    try {
      const made = await send<NotebookCreated>('POST', `/api/v1/notebooks/${notebook.id}/copy`, body);
      router.push(`/notebooks/${made.id}`);
    } catch (thrown) {
      setError(asRequestError(thrown));
      setCopying(false);
    }
  }

  return (
    <form
      noValidate
      className="mb-4 grid max-w-[460px] gap-2 border-t border-hairline pt-2"
      onSubmit={(event) => {
        event.preventDefault();
        if (!copying && title.trim()) void copy();
      }}
    >
      <Field
        label="Title of the copy"
        name="copy-title"
        value={title}
        maxLength={160}
        autoComplete="off"
        error={detailAt(error, 'title')}
        onChange={(event) => setTitle(event.target.value)}
      />
      <SelectField
        label="Settings"
        name="copy-from"
        value={from}
        options={[
          { value: '', label: `as they stand, revision ${notebook.revision}` },
          ...(fit ? [{ value: fit.id, label: `as fit ${fit.number} froze them` }] : []),
        ]}
        error={detailAt(error, 'fit')}
        onChange={(event) => setFrom(event.target.value)}
        help="Cut, likelihood, template and priors; no fit goes along."
      />
      <SelectField
        label="Measurement"
        name="copy-measurement"
        value={target}
        options={[
          { value: '', label: `${notebook.measurement.name}, version ${notebook.measurement.version}` },
          ...others.map(({ id, name, version, rows }) => ({
            value: id,
            label: `${name}, version ${version} (${rows} bins)`,
          })),
        ]}
        error={detailAt(error, 'measurement')}
        onChange={(event) => setTarget(event.target.value)}
      />
      <Buttons>
        <Button
          type="submit"
          kind="primary"
          reason={copying ? 'It is being copied.' : title.trim() ? undefined : 'Give it a title.'}
        >
          Open the copy
        </Button>
        <Button onClick={onDone}>Leave it</Button>
      </Buttons>
      <RequestMessage error={error} title="No copy was opened" shown={['title', 'measurement', 'fit']} />
    </form>
  );
}
