'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field, SelectField } from '@/components/ui/field';
import { WordButton } from '@/components/ui/word-button';
import { capital, counted, inWords } from '@/components/words/counts';
import type { CreateNotebook, MeasurementSummary, NotebookCreated } from '@/lib/schemas';
import { templateCatalogue } from '@/lib/templates';
import { mostMeasurements } from './further-words';
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
  const [also, setAlso] = useState<string[]>([]);
  const [template, setTemplate] = useState('locked-squeezed');
  const [fields, setFields] = useState(2);
  const [ownTitle, setOwnTitle] = useState<string | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const [opening, setOpening] = useState(false);

  const choices = fieldChoices(template);
  const count = choices.includes(fields) ? fields : (choices[choices.length - 1] ?? 0);
  const measured = measurements.find(({ id }) => id === measurement);
  const further = also.filter((id) => id !== measurement);
  const left = measurements.filter(({ id }) => id !== measurement && !further.includes(id));
  const title = ownTitle ?? `${templateTitle(template, count)} in ${measured?.name ?? 'a measurement'}`;

  async function create() {
    setError(null);
    setOpening(true);
    const body: CreateNotebook = {
      title: title.trim(),
      measurement,
      ...(further.length ? { alsoMeasurements: further.map((id) => ({ measurement: id })) } : {}),
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
      {further.length ? (
        <ul className="m-0 grid list-none gap-1 p-0">
          {further.map((id, k) => (
            <li key={id} className="flex flex-wrap items-baseline gap-x-3 text-small">
              <span>together with {measurements.find((each) => each.id === id)?.name}</span>
              <WordButton onClick={() => setAlso(further.filter((each) => each !== id))}>
                take it out
              </WordButton>
              {detailAt(error, `alsoMeasurements.${k}.measurement`)}
            </li>
          ))}
        </ul>
      ) : null}
      {left.length && further.length + 1 < mostMeasurements ? (
        <SelectField
          label="Fit another measurement with it"
          name="further"
          value=""
          options={[
            { value: '', label: 'none' },
            ...left.map(({ id, name, version, rows }) => ({
              value: id,
              label: `${name}, version ${version} (${rows} bins)`,
            })),
          ]}
          onChange={(event) => {
            if (event.target.value) setAlso([...further, event.target.value]);
          }}
          help="For fields that are to explain several measurements at once; each keeps a background of its own."
        />
      ) : null}
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
