'use client';

import dynamic from 'next/dynamic';
import Link from 'next/link';
import { useState, type ReactNode } from 'react';
import type { PageStream } from '@/components/fit/use-page-events';
import { Message } from '@/components/ui/message';
import { Record } from '@/components/ui/record';
import { PageHead } from '@/components/ui/section';
import { StateWord } from '@/components/ui/state-word';
import { WordButton } from '@/components/ui/word-button';
import { listed } from '@/components/words/counts';
import { clockTime, dayAndMonth } from '@/components/words/dates';
import { shortName } from '@/components/words/people';
import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { TitleForm } from './notebook-title';
import { originInWords, revisionInWords } from './revision-words';
import type { NotebookState } from './use-notebook';

const CopyForm = dynamic(() => import('./copy-form').then((m) => m.CopyForm));
const PutAway = dynamic(() => import('./put-away').then((m) => m.PutAway));

/** Everybody who has settled something, in the order of their first revision. */
function authors(notebook: Notebook): string[] {
  return [...new Set([notebook.createdBy, ...notebook.record.map(({ by }) => by)])].map(shortName);
}

type Doing = 'title' | 'copy' | 'away' | null;

const buttonId = (doing: Doing) => `do-${doing}`;

/** What can be done with all of a notebook: words that open a form below, and stay, so that the focus can come back to them. */
function Actions({
  notebook,
  doing,
  onDo,
}: {
  notebook: Notebook;
  doing: Doing;
  onDo: (doing: Doing) => void;
}) {
  const { may, archived } = notebook;
  const opens = (what: Doing) => ({
    id: buttonId(what),
    expanded: doing === what,
    onClick: () => onDo(doing === what ? null : what),
  });
  return (
    <span className="no-print inline-flex flex-wrap gap-x-3">
      {may.includes('notebook.edit') ? <WordButton {...opens('title')}>change the title</WordButton> : null}
      {may.includes('notebook.create') ? <WordButton {...opens('copy')}>copy</WordButton> : null}
      {may.includes('notebook.archive') && !archived ? (
        <WordButton {...opens('away')}>{notebook.fits.length ? 'archive' : 'archive or delete'}</WordButton>
      ) : null}
    </span>
  );
}

/** The others who have the notebook open, and whether this page hears of what they save. */
function Company({ stream: { others, connection } }: { stream: PageStream }) {
  if (connection.kind === 'away') {
    const { what, at, secondsLeft, retry } = connection;
    return (
      <Record>
        <StateWord kind="warn">
          {what === 'server' ? 'The server can’t be reached' : 'The database is away'} since {clockTime(at)}
        </StateWord>
        <br />
        What others save is seen when it is back, which this page notices by itself. What you write stays here
        until then. {secondsLeft === null ? null : <WordButton onClick={retry}>Try now</WordButton>}
      </Record>
    );
  }
  return others.length ? (
    <Record>
      Also here: <b>{listed(others.map(shortName))}</b>
    </Record>
  ) : null;
}

export interface NotebookHeadProps {
  state: NotebookState;
  measurement: Measurement;
  fit: Fit | null;
  stream: PageStream;
  abstract: ReactNode;
}

/** Head of a notebook: title, who wrote it, what can be done with all of it, and who else has it open. */
export function NotebookHead({ state, measurement, fit, stream, abstract }: NotebookHeadProps) {
  const { notebook } = state;
  const [doing, setDoing] = useState<Doing>(null);
  const last = notebook.record.find(({ revision }) => revision === notebook.revision);
  const done = () => {
    document.getElementById(buttonId(doing))?.focus();
    setDoing(null);
  };
  return (
    <PageHead
      title={notebook.title}
      kicker={[
        `Notebook ${notebook.number}, revision ${notebook.revision}`,
        ...(notebook.archived ? ['archived'] : []),
        ...(notebook.blind ? ['blind'] : []),
        ...(notebook.simulated ? ['simulated measurement'] : []),
      ].join(', ')}
      byline={
        <span className="flex flex-wrap items-baseline gap-x-3">
          <span>{listed(authors(notebook))}</span>
          <Actions notebook={notebook} doing={doing} onDo={setDoing} />
        </span>
      }
      abstract={abstract}
      margin={
        <>
          {last ? (
            <Record at={last.at}>
              Revision {last.revision} by <b>{shortName(last.by)}</b>: {revisionInWords(last)}
            </Record>
          ) : null}
          {notebook.revision > 1 ? (
            <Record>
              <Link href={`/notebooks/${notebook.id}/revisions`}>All {notebook.revision} revisions</Link>
            </Record>
          ) : null}
          {notebook.origin ? <Record>{originInWords(notebook.origin)}</Record> : null}
          <div aria-live="polite">
            <Company stream={stream} />
          </div>
        </>
      }
    >
      {stream.connection.kind === 'gone' ? (
        <Message level="warning" title="This notebook isn’t there for you any more">
          <p>
            It was deleted, or your place in the group has changed. What you see is what was last received;
            nothing can be saved.
          </p>
        </Message>
      ) : null}
      {notebook.archived ? (
        <Message
          level="warning"
          quiet
          title={`Archived by ${shortName(notebook.archived.by)} on ${dayAndMonth(notebook.archived.at)}`}
        >
          <p>It is read and copied, not changed. What was tried in it stays on record.</p>
          {notebook.may.includes('notebook.archive') ? <PutAway state={state} onDone={done} /> : null}
        </Message>
      ) : null}
      {doing === 'title' ? <TitleForm state={state} onDone={done} /> : null}
      {doing === 'copy' ? (
        <CopyForm notebook={notebook} measurement={measurement} fit={fit} onDone={done} />
      ) : null}
      {doing === 'away' ? <PutAway state={state} onDone={done} /> : null}
    </PageHead>
  );
}
