'use client';

import { useRouter } from 'next/navigation';
import { useMemo, useRef, useState } from 'react';
import { asRequestError, detailAt, upload, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Contents } from '@/components/ui/contents';
import { CheckField, Field, FieldPair } from '@/components/ui/field';
import { Message } from '@/components/ui/message';
import { NumberField } from '@/components/ui/number-field';
import { Record } from '@/components/ui/record';
import { Ruler } from '@/components/ui/run-figures';
import { PageHead, Section } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';
import { shortName } from '@/components/words/people';
import { formatCount, formatPercent } from '@/lib/figures/format';
import type { ColumnMapping, PowerSpectrum } from '@/lib/measurements';
import type { MeasurementCreated, UploadMeta } from '@/lib/schemas';
import { addFiles, changePart } from './chosen-files';
import { ChecksTable } from './checks-table';
import { ColumnsTable, withMapping } from './columns-table';
import { DropZone } from './drop-zone';
import { SpectrumFields } from './spectrum-fields';
import { PreflightFigure } from './preflight-figure';
import { parseTruth } from './truth-words';
import { NextVersion, type NextOf } from './next-version';
import { nameFromFile, preflightSentence, storeReason, uploadStates } from './upload-words';
import { usePreflight, type ChosenFile } from './use-preflight';

export interface UploadSheetProps {
  groupId: string;
  groupName: string;
  email: string;
  /** Given: what is stored becomes a newer version of it. */
  onto?: NextOf;
}

/** From files to a stored measurement, on one page; nothing is stored before every error is gone. */
export function UploadSheet({ groupId, groupName, email, onto }: UploadSheetProps) {
  const router = useRouter();
  const [files, setFiles] = useState<ChosenFile[]>([]);
  const [mapping, setMapping] = useState<ColumnMapping | null>(null);
  const [spectrum, setSpectrum] = useState<PowerSpectrum | null>(null);
  const [mockCount, setMockCount] = useState<number | null>(null);
  const [name, setName] = useState('');
  const [named, setNamed] = useState(false);
  const [description, setDescription] = useState('');
  const [simulated, setSimulated] = useState(onto?.simulated ?? false);
  const [truth, setTruth] = useState('');
  const [share, setShare] = useState<number | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const serial = useRef(0);

  const withCovariance = files.some(({ part }) => part === 'covariance');
  const { view, reading, fault } = usePreflight(files, mapping, withCovariance ? mockCount : null, spectrum);
  const columns = view ? withMapping(view.columns, mapping) : [];
  const ofB = columns.some(({ role }) => role === 'B');
  const points = files.find(({ part }) => part === 'file');
  const put = parseTruth(simulated ? truth : '');
  const now = { files: files.length, reading, named: onto !== undefined || name.trim() !== '', share };
  const states = uploadStates(view, now);

  function choose(next: ChosenFile[]) {
    const nextPoints = next.find(({ part }) => part === 'file');
    if (nextPoints?.key !== points?.key) {
      setMapping(null);
      setSpectrum(null);
      if (!named) setName(nextPoints ? nameFromFile(nextPoints.file.name) : '');
    }
    setError(null);
    setFiles(next);
  }

  function add(dropped: File[]) {
    choose(addFiles(files, dropped, () => `file-${++serial.current}`));
  }

  async function store() {
    setError(null);
    setShare(0);
    const form = new FormData();
    for (const { part, file } of files) form.append(part, file, file.name);
    const meta: UploadMeta = {
      ...(onto ? {} : { name: name.trim() }),
      ...(description.trim() ? { description: description.trim() } : {}),
      ...(mapping ? { columns: mapping } : {}),
      ...(ofB && spectrum ? { spectrum } : {}),
      ...(withCovariance && mockCount !== null ? { mockCount } : {}),
      ...(simulated ? { simulated } : {}),
      ...('values' in put && put.values ? { truth: put.values } : {}),
    };
    form.append('meta', JSON.stringify(meta));
    try {
      const made = await upload<MeasurementCreated>(
        onto ? `/api/v1/measurements/${onto.id}/versions` : `/api/v1/groups/${groupId}/measurements`,
        form,
        setShare,
      );
      router.push(`/measurements/${made.id}`);
    } catch (thrown) {
      setError(asRequestError(thrown));
      setShare(null);
    }
  }

  const saidOf = useMemo(
    () =>
      ({ part }: ChosenFile) => {
        if (!view || reading) return '';
        if (part === 'file') return `, ${formatCount(view.rows)} rows, read in ${formatCount(view.took)} ms`;
        if (part === 'mocks' && view.mockCount !== null)
          return `, ${formatCount(view.mockCount)} mocks of ${formatCount(view.rows)} bins`;
        return '';
      },
    [view, reading],
  );

  const reason = 'fault' in put ? 'Mend the values that were put in first.' : storeReason(view, now);
  const storing = onto ? 'Store' : 'Name and store';
  return (
    <Sheet
      contents={
        <Contents
          label="Steps"
          entries={[
            { href: '#file', number: 1, title: 'File', state: states.file },
            { href: '#columns', number: 2, title: 'Columns', state: states.columns },
            { href: '#preflight', number: 3, title: 'Preflight', state: states.preflight },
            { href: '#store', number: 4, title: storing, state: states.store },
          ]}
        />
      }
    >
      <div id="file">
        <PageHead
          title={onto ? `Version ${onto.newest + 1} of ${onto.name}` : 'Add a measurement'}
          kicker={`${groupName}, measurements`}
          margin={
            <>
              <Record>
                Read for <b>{shortName(email)}</b>
              </Record>
              <Record>Nothing is stored until every error is gone.</Record>
            </>
          }
        >
          <DropZone
            files={files}
            onAdd={add}
            onPart={(key, part) => choose(changePart(files, key, part))}
            onRemove={(key) => choose(files.filter((file) => file.key !== key))}
            saidOf={saidOf}
          />
          {withCovariance ? (
            <div className="mt-2 max-w-[324px]">
              <NumberField
                integer
                label="Mocks behind the covariance"
                name="mockCount"
                value={mockCount}
                onValue={setMockCount}
                error={detailAt(error, 'meta.mockCount')}
                help="Leave it empty where the covariance is known exactly."
              />
            </div>
          ) : null}
          {files.length > 0 && !points ? (
            <Message level="warning" title="The points are missing">
              <p>Drop the binned measurement too, or say above which of the files it is.</p>
            </Message>
          ) : null}
          {fault ? (
            <Message level="error" title="The files could not be read">
              <p>{fault} Choose them again.</p>
            </Message>
          ) : null}
          <div className="h-6" />
        </PageHead>
      </div>
      <Section
        id="columns"
        number={2}
        title="Columns"
        state={states.columns}
        margin={
          view?.columns.length ? (
            <Record>
              {mapping ? 'Set by hand.' : 'Recognised by name.'} Change a meaning and the checks below run
              again.
            </Record>
          ) : null
        }
      >
        {view?.columns.length ? (
          <>
            <ColumnsTable view={view} mapping={mapping} onMapping={setMapping} />
            {ofB ? (
              <SpectrumFields
                columns={columns}
                checks={view.checks}
                value={spectrum ?? {}}
                onValue={setSpectrum}
              />
            ) : null}
          </>
        ) : (
          <p className="text-ink-2">The columns stand here once a file is read.</p>
        )}
      </Section>
      <Section
        id="preflight"
        number={3}
        title="Preflight"
        state={states.preflight}
        margin={
          view ? <Record>The server makes the same checks again before it stores anything.</Record> : null
        }
      >
        {view ? (
          <>
            <p aria-live="polite">{preflightSentence(view)}</p>
            <ChecksTable checks={view.checks} />
            <PreflightFigure view={view} />
          </>
        ) : (
          <p className="text-ink-2">
            Rows, range of κ, edges, covariance and mocks are checked as soon as they are read.
          </p>
        )}
      </Section>
      <Section id="store" number={4} title={storing} state={states.store}>
        <form
          noValidate
          onSubmit={(event) => {
            event.preventDefault();
            if (!reason) void store();
          }}
        >
          {onto ? (
            <NextVersion onto={onto} />
          ) : (
            <FieldPair>
              <Field
                label="Name"
                name="name"
                maxLength={120}
                autoComplete="off"
                value={name}
                onChange={(event) => {
                  setName(event.target.value);
                  setNamed(true);
                }}
                error={detailAt(error, 'meta.name')}
                help="New in this group; becomes version 1."
              />
              <Field
                label="Description"
                name="description"
                maxLength={2000}
                autoComplete="off"
                value={description}
                onChange={(event) => setDescription(event.target.value)}
                error={detailAt(error, 'meta.description')}
                help="One sentence beside it in the index; may stay empty."
              />
            </FieldPair>
          )}
          <div className="mt-2">
            {onto ? null : (
              <CheckField
                label="Simulated"
                name="simulated"
                checked={simulated}
                onChange={(event) => setSimulated(event.target.checked)}
                help="Made, not measured: its notebooks and results are marked as such."
              />
            )}
            {simulated ? (
              <Field
                label="Values that were put in"
                name="truth"
                autoComplete="off"
                value={truth}
                onChange={(event) => setTruth(event.target.value)}
                error={'fault' in put ? put.fault : detailAt(error, 'meta.truth')}
                help="Such as mu1 = 1.3, g = 12: drawn over every posterior; may stay empty."
              />
            ) : null}
          </div>
          <Buttons note={share === null ? undefined : `${formatPercent(share)} has left this machine.`}>
            <Button kind="primary" type="submit" reason={reason}>
              Store version {onto ? onto.newest + 1 : 1}
            </Button>
          </Buttons>
          {share === null ? null : <Ruler done={share} label={`Upload, ${formatPercent(share)}`} />}
        </form>
        <RequestMessage
          error={error}
          title="Nothing was stored"
          shown={['meta.name', 'meta.description', 'meta.mockCount', 'meta.truth']}
        />
      </Section>
    </Sheet>
  );
}
