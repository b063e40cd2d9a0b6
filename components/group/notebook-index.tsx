'use client';

import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { fitPredicate, fitState } from '@/components/fit/fit-words';
import { templateTitle } from '@/components/notebook/template-words';
import { Field } from '@/components/ui/field';
import { IndexEntry, IndexList } from '@/components/ui/index-list';
import type { State } from '@/components/ui/state-word';
import { WordButton } from '@/components/ui/word-button';
import { capital, counted, listed } from '@/components/words/counts';
import { dayAndMonth } from '@/components/words/dates';
import { shortName } from '@/components/words/people';
import type { NotebookSummary } from '@/lib/schemas';
import { SeenSpark } from './seen-spark';

/** As many are read at a glance; from here on words find one sooner. */
const manyNotebooks = 6;

/** States of a notebook in an index: archived or blind first, then its last fit's, else that it is being set. */
export function notebookStates(notebook: NotebookSummary): State[] {
  const { lastFit, archivedAt } = notebook;
  const archived: State[] = archivedAt === null ? [] : [{ kind: 'old', word: 'archived' }];
  const blind: State[] = notebook.blind ? [{ kind: 'blind', word: 'blind' }] : [];
  return [...archived, ...blind, lastFit ? fitState(lastFit.status) : { kind: 'open', word: 'being set' }];
}

/** Everything of a notebook that its entry says, in small letters: each of the words sought has to stand in it. */
export function matchesWords(notebook: NotebookSummary, words: string): boolean {
  const { number, title, measurementName, templateId, fields, updatedBy, simulated } = notebook;
  const said = [
    String(number),
    title,
    measurementName,
    ...notebook.also.map(({ name }) => name),
    templateTitle(templateId, fields),
    updatedBy,
    simulated ? 'simulated' : '',
    ...notebookStates(notebook).map(({ word }) => String(word)),
  ]
    .join(' ')
    .toLowerCase();
  return words
    .toLowerCase()
    .split(/\s+/)
    .every((word) => said.includes(word));
}

function Sentence({ notebook }: { notebook: NotebookSummary }) {
  const { lastFit, measurementName, also, templateId, fields, settledRevision, simulated } = notebook;
  return (
    <>
      {templateTitle(templateId, fields)} in {listed([measurementName, ...also.map(({ name }) => name)])}
      {simulated ? ', simulated' : ''}.{' '}
      {lastFit
        ? `Fit ${lastFit.number}${lastFit.revision >= settledRevision ? '' : `, of revision ${lastFit.revision},`} ${fitPredicate(lastFit.status)}.`
        : 'No fit yet.'}
    </>
  );
}

function Entries({
  notebooks,
  onRestore,
}: {
  notebooks: readonly NotebookSummary[];
  /** Given where the reader may take archived ones back. */
  onRestore?: (notebook: NotebookSummary) => void;
}) {
  return (
    <IndexList>
      {notebooks.map((notebook) => (
        <IndexEntry
          key={notebook.id}
          number={notebook.number}
          title={notebook.title}
          href={`/notebooks/${notebook.id}`}
          states={notebookStates(notebook)}
          figure={<SeenSpark notebook={notebook} />}
          note={`${dayAndMonth(notebook.updatedAt)}, ${shortName(notebook.updatedBy)}`}
        >
          <Sentence notebook={notebook} />
          {onRestore && notebook.archivedAt !== null ? (
            <span className="ml-[8px] inline-block">
              <WordButton of={notebook.title} onClick={() => onRestore(notebook)}>
                take back into use
              </WordButton>
            </span>
          ) : null}
        </IndexEntry>
      ))}
    </IndexList>
  );
}

/** Notebooks put away: below the others, folded until somebody looks for one. */
function Archived({
  notebooks,
  sought,
  onRestore,
}: {
  notebooks: readonly NotebookSummary[];
  sought: boolean;
  onRestore?: (notebook: NotebookSummary) => void;
}) {
  const [opened, setOpened] = useState(false);
  // What was sought and found isn't hidden again behind a word.
  const open = opened || sought;
  return (
    <div className="mt-4">
      <h3 className="text-entry">
        <button
          type="button"
          aria-expanded={open}
          className="min-h-target text-left decoration-1 underline-offset-4 hover:underline"
          onClick={() => setOpened(!open)}
        >
          Archived <span className="text-ink-2">{notebooks.length}</span>
          <svg
            width="12"
            height="12"
            viewBox="0 0 12 12"
            fill="none"
            stroke="currentColor"
            aria-hidden="true"
            className={`no-print ml-[10px] inline-block align-baseline text-ink-2 ${open ? 'rotate-180' : ''}`}
          >
            <path d="M2 4l4 4 4-4" />
          </svg>
        </button>
      </h3>
      {open ? (
        <Entries notebooks={notebooks} onRestore={onRestore} />
      ) : (
        <p className="mb-0 text-small text-ink-2">
          {capital(counted(notebooks.length, 'notebook'))} put away; what was tried stays on record.
        </p>
      )}
    </div>
  );
}

export interface NotebookIndexProps {
  notebooks: readonly NotebookSummary[];
  /** Whether the reader may take archived ones back into use. */
  restorable: boolean;
  onChanged: () => void;
}

/** A group's notebooks, last changed first, sought by words where they are many. */
export function NotebookIndex({ notebooks, restorable, onChanged }: NotebookIndexProps) {
  const [words, setWords] = useState('');
  const [error, setError] = useState<RequestError | null>(null);
  const sought = words.trim();
  const found = sought ? notebooks.filter((each) => matchesWords(each, sought)) : notebooks;
  const inUse = found.filter(({ archivedAt }) => archivedAt === null);
  const archived = found.filter(({ archivedAt }) => archivedAt !== null);

  async function restore({ id }: NotebookSummary) {
    setError(null);
    try {
      await send('POST', `/api/v1/notebooks/${id}/unarchive`);
      onChanged();
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
  }

  return (
    <>
      {notebooks.length >= manyNotebooks ? (
        <div className="no-print mb-3 flex flex-wrap items-end gap-x-3 border-t border-ink pt-2">
          <div className="w-[340px] max-w-full">
            <Field
              label="Find by words"
              name="words"
              type="search"
              autoComplete="off"
              value={words}
              onChange={(event) => setWords(event.target.value)}
            />
          </div>
          <p role="status" className="mb-[8px] font-controls text-note text-ink-2">
            {sought ? `${found.length} of ${notebooks.length}` : `${notebooks.length} in all`}
          </p>
        </div>
      ) : null}
      {inUse.length ? <Entries notebooks={inUse} /> : null}
      {sought && found.length === 0 ? (
        <p className="border-t border-ink pt-2">No notebook says that in its title, measurement or state.</p>
      ) : null}
      {!sought && inUse.length === 0 ? (
        <p className="border-t border-ink pt-2 text-ink-2">No notebook is in use.</p>
      ) : null}
      {archived.length ? (
        <Archived
          notebooks={archived}
          sought={sought !== ''}
          onRestore={restorable ? (notebook) => void restore(notebook) : undefined}
        />
      ) : null}
      <RequestMessage error={error} title="It stays archived" />
    </>
  );
}
