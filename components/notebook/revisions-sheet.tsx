'use client';

import Link from 'next/link';
import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { usePageEvents } from '@/components/fit/use-page-events';
import { Asking } from '@/components/ui/asking';
import { Button, Buttons } from '@/components/ui/button';
import { DefinitionList } from '@/components/ui/definition-list';
import { FieldPair, SelectField } from '@/components/ui/field';
import { Stamp } from '@/components/ui/num';
import { PageHead, Subheading } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import { capital, counted } from '@/components/words/counts';
import { shortName } from '@/components/words/people';
import type { Notebook, Revision } from '@/lib/schemas';
import { differences, revisionInWords, settledLines } from './revision-words';
import { useNotebook, type NotebookState } from './use-notebook';

/** A revision never changes once it is written. */
const once = { revalidateOnFocus: false, revalidateIfStale: false } as const;

const useRevision = (notebookId: string, revision: number) =>
  useSWR(`/api/v1/notebooks/${notebookId}/revisions/${revision}`, read<Revision>, once);

function List({ notebook, onRead }: { notebook: Notebook; onRead: (revision: number) => void }) {
  const newest = [...notebook.record].sort((a, b) => b.revision - a.revision);
  return (
    <DataTable
      ruled
      label="Revisions"
      phoneColumns="48px minmax(0,1fr)"
      columns={[
        { key: 'revision', head: 'Revision', phone: { area: '1 / 1' } },
        { key: 'what', head: 'Changed', phone: { area: '1 / 2' } },
        { key: 'who', head: 'By', phone: { area: '2 / 2' } },
        { key: 'when', head: 'When', phone: { area: '3 / 2' } },
        { key: 'fits', head: 'Fits', phone: { area: '4 / 2', label: 'Fits' } },
        { key: 'read', head: '', phone: { area: '5 / 2' } },
      ]}
      rows={newest.map((entry) => {
        const fits = notebook.fits.filter(({ revision }) => revision === entry.revision);
        return {
          key: String(entry.revision),
          cells: {
            revision: (
              <>
                {entry.revision}
                {entry.revision === notebook.revision ? (
                  <span className="block font-controls text-note text-ink-2">stands</span>
                ) : null}
              </>
            ),
            what: capital(revisionInWords(entry)),
            who: shortName(entry.by),
            when: <Stamp at={entry.at} />,
            fits: fits.length
              ? fits
                  .map(({ number }) => number)
                  .sort((a, b) => a - b)
                  .join(', ')
              : 'none',
            read: (
              <WordButton of={`revision ${entry.revision}`} onClick={() => onRead(entry.revision)}>
                read
              </WordButton>
            ),
          },
        };
      })}
    />
  );
}

function Comparison({ notebook, from, to }: { notebook: Notebook; from: number; to: number }) {
  const before = useRevision(notebook.id, from).data;
  const after = useRevision(notebook.id, to).data;
  if (!before || !after) return <p className="text-ink-2">Both revisions are being read.</p>;
  const found = differences(before, after);
  if (!found.length)
    return (
      <p>
        Revisions {from} and {to} say the same.
      </p>
    );
  return (
    <DataTable
      label={`What changed from revision ${from} to revision ${to}`}
      phoneColumns="minmax(0,1fr) minmax(0,1fr)"
      columns={[
        { key: 'what', head: '', phone: { area: '1 / 1 / 2 / 3' } },
        { key: 'before', head: `Revision ${from}`, phone: { area: '2 / 1', label: `Revision ${from}` } },
        { key: 'after', head: `Revision ${to}`, phone: { area: '2 / 2', label: `Revision ${to}` } },
      ]}
      rows={found.map((each) => ({
        key: each.key,
        cells: {
          what: each.what,
          before: each.before ?? 'doesn’t apply',
          after: each.after ?? 'doesn’t apply',
        },
      }))}
    />
  );
}

function Reading({ state, revision }: { state: NotebookState; revision: number }) {
  const { notebook } = state;
  const { data } = useRevision(notebook.id, revision);
  const [asking, setAsking] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const stands = revision === notebook.revision;

  async function restore() {
    setError(null);
    setAsking(false);
    const path = `/api/v1/notebooks/${notebook.id}/revisions/${revision}/restore`;
    try {
      await state.put(await send<Notebook>('POST', path, { revision: notebook.revision }));
    } catch (thrown) {
      setError(asRequestError(thrown));
      void state.refresh();
    }
  }

  if (!data) return <p className="text-ink-2">Revision {revision} is being read.</p>;
  return (
    <>
      <DefinitionList entries={settledLines(data).map(({ what, value }) => ({ term: what, text: value }))} />
      {notebook.may.includes('notebook.edit') ? (
        asking ? (
          <Asking
            question={`Make revision ${revision} stand again? It becomes revision ${notebook.revision + 1}; revision ${notebook.revision} stays in the list.`}
            act={`Bring revision ${revision} back`}
            keep="Leave it"
            onAct={() => void restore()}
            onKeep={() => setAsking(false)}
          />
        ) : (
          <Buttons>
            <Button
              onClick={() => setAsking(true)}
              reason={stands ? 'It is the one that stands.' : undefined}
            >
              Bring revision {revision} back
            </Button>
          </Buttons>
        )
      ) : null}
      <RequestMessage error={error} title={`Revision ${notebook.revision} still stands`} />
    </>
  );
}

export interface RevisionsSheetProps {
  notebook: Notebook;
  from: number | null;
  to: number | null;
}

/** Every revision of a notebook: who changed what, two of them beside each other, and each as it was. */
export function RevisionsSheet(props: RevisionsSheetProps) {
  const state = useNotebook(props.notebook);
  const { notebook } = state;
  usePageEvents(notebook.id, null, { onNotebook: state.put, onFit: () => undefined });
  const [chosenFrom, setFrom] = useState(props.from);
  const [chosenTo, setTo] = useState(props.to);
  const [reading, setReading] = useState<number | null>(null);
  const to = chosenTo ?? notebook.revision;
  const from = chosenFrom ?? Math.max(1, to - 1);
  const choices = notebook.record.map(({ revision }) => ({
    value: String(revision),
    label: revision === notebook.revision ? `${revision}, stands` : String(revision),
  }));
  const shown = reading ?? notebook.revision;
  return (
    <Sheet>
      <PageHead
        title="Revisions"
        kicker={`Notebook ${notebook.number}`}
        byline={<Link href={`/notebooks/${notebook.id}`}>{notebook.title}</Link>}
        abstract={`${capital(counted(notebook.record.length, 'revision'))}. Each was saved as a whole and stays as it is; a fit freezes the one that stands when it starts.`}
      />
      <SheetRow>
        <List
          notebook={notebook}
          onRead={(revision) => {
            setReading(revision);
            document.getElementById('reading')?.scrollIntoView();
          }}
        />
        <Subheading>What changed</Subheading>
        <FieldPair>
          <SelectField
            label="From revision"
            name="from"
            value={String(from)}
            options={choices}
            onChange={(event) => setFrom(Number(event.target.value))}
          />
          <SelectField
            label="To revision"
            name="to"
            value={String(to)}
            options={choices}
            onChange={(event) => setTo(Number(event.target.value))}
          />
        </FieldPair>
        <div className="mt-3">
          <Comparison notebook={notebook} from={from} to={to} />
        </div>
        <Subheading id="reading">Revision {shown}</Subheading>
        <Reading key={shown} state={state} revision={shown} />
      </SheetRow>
    </Sheet>
  );
}
