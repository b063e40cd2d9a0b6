'use client';

import dynamic from 'next/dynamic';
import { useState } from 'react';
import { detailAt } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { ConflictMessage, twoStand } from '@/components/notebook/conflict-message';
import { SaveRow } from '@/components/notebook/save-row';
import { conflictOf, type Draft } from '@/components/notebook/section-draft';
import type { SectionFold } from '@/components/notebook/use-folds';
import { useSectionSave, type NotebookState } from '@/components/notebook/use-notebook';
import { Button, Buttons } from '@/components/ui/button';
import { Section } from '@/components/ui/section';
import type { State } from '@/components/ui/state-word';
import { counted, capital } from '@/components/words/counts';
import type { Notebook, Statement } from '@/lib/schemas';
import { StatementMargin } from './statement-margin';
import { statementSentence } from './statement-state';
import { StatementWords } from './statement-words';
import { useStatement, useTypeset } from './use-statement';

const StatementEditor = dynamic(() => import('./statement-editor').then((m) => m.StatementEditor));

export interface StatementSectionProps {
  number: number;
  state: NotebookState;
  statement: Statement;
  sectionState: State;
  draft: Draft<string>;
  fold: SectionFold;
  /** Shows a fit in the sections above. */
  onShow: (fitId: string) => void;
}

/** Words of an earlier revision, read beside nothing: they can't be changed. */
function Earlier({
  notebook,
  initial,
  at,
  onShow,
  onBack,
}: {
  notebook: Notebook;
  initial: Statement;
  at: number;
  onShow: (fitId: string) => void;
  onBack: () => void;
}) {
  const earlier = useStatement(notebook, initial, at);
  return (
    <>
      <p className="text-small text-ink-2">Words as they stood in revision {at}, with the numbers of now.</p>
      {earlier ? (
        earlier.paragraphs.length ? (
          <StatementWords paragraphs={earlier.paragraphs} onShow={onShow} />
        ) : (
          <p className="text-lead text-ink-2">No words.</p>
        )
      ) : null}
      <Buttons>
        <Button onClick={onBack}>Back to the words that stand</Button>
      </Buttons>
    </>
  );
}

/** The group's own words, with numbers that come from fits by reference. */
export function StatementSection(props: StatementSectionProps) {
  const { number, state, statement, draft, fold, onShow } = props;
  const { notebook } = state;
  const section = useSectionSave(state);
  const [opened, setOpened] = useState(false);
  const [at, setAt] = useState<number | null>(null);
  const editable = notebook.may.includes('notebook.edit');
  const writing = editable && (opened || draft.changed);
  // Whoever only reads asks for nothing.
  const typeset = useTypeset(notebook, writing ? draft.value : '');
  const { error } = section;
  const conflict = conflictOf(draft, notebook, section);
  const faults = typeset.faults.length;

  async function save(base: number) {
    if (!(await section.save({ statement: draft.value }, base))) return;
    draft.reset();
    setOpened(false);
  }

  return (
    <Section
      id="statement"
      number={number}
      title="Statement"
      state={props.sectionState}
      fold={{ ...fold, sentence: statementSentence(statement) }}
      margin={<StatementMargin statement={statement} at={at} onRead={setAt} />}
    >
      {at !== null && !writing ? (
        <Earlier notebook={notebook} initial={statement} at={at} onShow={onShow} onBack={() => setAt(null)} />
      ) : writing ? (
        <>
          <StatementEditor
            notebook={notebook}
            text={draft.value}
            typeset={typeset}
            refused={detailAt(error, 'statement')}
            onText={draft.change}
            onShow={onShow}
          />
          <SaveRow
            draft={draft}
            revision={notebook.revision}
            saving={section.saving}
            fault={
              conflict
                ? twoStand
                : faults
                  ? `${capital(counted(faults, 'reference'))} ${faults === 1 ? 'has' : 'have'} to be mended first.`
                  : undefined
            }
            onSave={() => void save(draft.base)}
          />
          {draft.changed ? null : (
            <Buttons>
              <Button onClick={() => setOpened(false)}>Leave the words as they are</Button>
            </Buttons>
          )}
        </>
      ) : (
        <>
          {statement.paragraphs.length ? (
            <StatementWords paragraphs={statement.paragraphs} onShow={onShow} />
          ) : (
            <p>
              No words yet. They say what the group holds to be shown; numbers stand in them by reference to a
              fit, so that they can’t go stale.
            </p>
          )}
          {editable ? (
            <Buttons>
              <Button onClick={() => setOpened(true)}>
                {statement.paragraphs.length ? 'Change the words' : 'Write the statement'}
              </Button>
            </Buttons>
          ) : null}
        </>
      )}
      {conflict ? (
        <ConflictMessage
          conflict={conflict}
          section={section}
          sides={[{ key: 'statement', what: 'Words', theirs: conflict.theirs.statement, mine: draft.value }]}
          onMine={(base) => void save(base)}
          onTheirs={() => {
            section.settle();
            draft.reset();
            void state.put(conflict.theirs);
          }}
        />
      ) : null}
      <RequestMessage error={error} title="The statement was not saved" shown={['statement']} />
    </Section>
  );
}
