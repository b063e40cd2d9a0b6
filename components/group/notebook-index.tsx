import { fitPredicate, fitState } from '@/components/fit/fit-words';
import { templateTitle } from '@/components/notebook/template-words';
import { IndexEntry, IndexList } from '@/components/ui/index-list';
import type { State } from '@/components/ui/state-word';
import { dayAndMonth } from '@/components/words/dates';
import { shortName } from '@/components/words/people';
import type { NotebookSummary } from '@/lib/schemas';

/** States of a notebook in an index: blind first, then its last fit's, else that it is being set. */
export function notebookStates(notebook: NotebookSummary): State[] {
  const blind: State[] = notebook.blind ? [{ kind: 'blind', word: 'blind' }] : [];
  const { lastFit } = notebook;
  return [...blind, lastFit ? fitState(lastFit.status) : { kind: 'open', word: 'being set' }];
}

function Sentence({ notebook }: { notebook: NotebookSummary }) {
  const { lastFit, measurementName, templateId, fields, settledRevision, simulated } = notebook;
  return (
    <>
      {templateTitle(templateId, fields)} in {measurementName}
      {simulated ? ', simulated' : ''}.{' '}
      {lastFit
        ? `Fit ${lastFit.number}${lastFit.revision >= settledRevision ? '' : `, of revision ${lastFit.revision},`} ${fitPredicate(lastFit.status)}.`
        : 'No fit yet.'}
    </>
  );
}

export function NotebookIndex({ notebooks }: { notebooks: readonly NotebookSummary[] }) {
  return (
    <IndexList>
      {notebooks.map((notebook) => (
        <IndexEntry
          key={notebook.id}
          number={notebook.number}
          title={notebook.title}
          href={`/notebooks/${notebook.id}`}
          states={notebookStates(notebook)}
          note={`${dayAndMonth(notebook.updatedAt)}, ${shortName(notebook.updatedBy)}`}
        >
          <Sentence notebook={notebook} />
        </IndexEntry>
      ))}
    </IndexList>
  );
}
