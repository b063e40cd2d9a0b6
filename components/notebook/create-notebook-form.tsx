'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field, SelectField } from '@/components/ui/field';
import { capital, counted, inWords } from '@/components/words/counts';
import type { CreateNotebook, MeasurementSummary, NotebookCreated } from '@/lib/schemas';
import { templateCatalogue } from '@/lib/templates';
import { templateTitle } from './template-words';
import { sectionNumber } from './sections';

const catalogue = templateCatalogue();

/** Numbers of fields that a template declares; none for the smooth background. A notebook can change it later. */
function fieldChoices(id: string): number[] {
  const option = catalogue
    .find((template) => template.id === id)
    ?.options.find(({ name }) => name === 'fields');
  if (option?.kind !== 'integer' && option?.kind !== 'fields') return [];
  return Array.from({ length: option.max - option.min + 1 }, (_, i) => option.min + i);
}

export interface CreateNotebookFormProps {
  groupId: string;
  measurements: readonly Pick<MeasurementSummary, 'id' | 'name' | 'version' | 'rows' | 'simulated'>[];
  /** Chosen beforehand. */
  measurementId?: string;
}

/** Opens a notebook with a title, a measurement and a template; everything else gets its default. */
export function CreateNotebookForm({ groupId, measurements, measurementId }: CreateNotebookFormProps) {
  const router = useRouter();
  const [measurement, setMeasurement] = useState(
    measurements.find(({ id }) => id === measurementId)?.id ?? measurements[0]?.id ?? '',
  );
  const [template, setTemplate] = useState('locked-squeezed');
  const [fields, setFields] = useState(2);
  const [ownTitle, setOwnTitle] = useState<string | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const [opening, setOpening] = useState(false);

  const choices = fieldChoices(template);
  const count = choices.includes(fields) ? fields : (choices[choices.length - 1] ?? 0);
  const measured = measurements.find(({ id }) => id === measurement);
  const title = ownTitle ?? `${templateTitle(template, count)} in ${measured?.name ?? 'a measurement'}`;

  async function create() {
    setError(null);
    setOpening(true);
    const body: CreateNotebook = {
      title: title.trim(),
      measurement,
      template: { id: template, options: count ? { fields: count } : {} },
    };
    try {
      const made = await send<NotebookCreated>('POST', `/api/v1/groups/${groupId}/notebooks`, body);
      router.push(`/notebooks/${made.id}`);
    } catch (thrown) {
      setError(asRequestError(thrown));
      setOpening(false);
    }
  }

  return (
    <form
      noValidate
      className="grid max-w-[460px] gap-2 border-t border-ink pt-2"
      onSubmit={(event) => {
        event.preventDefault();
        if (!opening && title.trim()) void create();
      }}
    >
      <SelectField
        label="Measurement"
        name="measurement"
        value={measurement}
        options={measurements.map(({ id, name, version, rows, simulated }) => ({
          value: id,
          label: `${name}, version ${version} (${rows} bins${simulated ? ', simulated' : ''})`,
        }))}
        error={detailAt(error, 'measurement')}
        onChange={(event) => setMeasurement(event.target.value)}
        help={
          measured
            ? `${capital(counted(measured.rows, 'bin'))}; cuts come in section ${sectionNumber('measurement')}.`
            : undefined
        }
      />
      <SelectField
        label="Template"
        name="template"
        value={template}
        options={catalogue.map(({ id, title: label }) => ({ value: id, label }))}
        error={detailAt(error, 'template')}
        onChange={(event) => setTemplate(event.target.value)}
        help={catalogue.find(({ id }) => id === template)?.summary}
      />
      {choices.length ? (
        <SelectField
          label="Number of fields"
          name="fields"
          value={String(count)}
          options={choices.map((value) => ({ value: String(value), label: inWords(value) }))}
          onChange={(event) => setFields(Number(event.target.value))}
        />
      ) : null}
      <Field
        label="Title"
        name="title"
        maxLength={160}
        autoComplete="off"
        value={title}
        onChange={(event) => setOwnTitle(event.target.value)}
        error={detailAt(error, 'title')}
        help="It can be changed later; everything else too."
      />
      <Buttons>
        <Button
          kind="primary"
          type="submit"
          reason={opening ? 'It is being opened.' : title.trim() ? undefined : 'Give it a title first.'}
        >
          Open the notebook
        </Button>
      </Buttons>
      <RequestMessage
        error={error}
        title="No notebook was opened"
        shown={['measurement', 'template', 'title']}
      />
    </form>
  );
}
