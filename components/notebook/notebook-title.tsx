'use client';

import { useState } from 'react';
import { detailAt } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';
import { Message } from '@/components/ui/message';
import { useSectionSave, type NotebookState } from './use-notebook';

/** Changes the title in place. */
export function TitleForm({ state, onDone }: { state: NotebookState; onDone: () => void }) {
  const { notebook } = state;
  const section = useSectionSave(state);
  const [origin] = useState(notebook.title);
  const [title, setTitle] = useState(origin);
  const same = title.trim() === notebook.title;
  const renamed = notebook.title !== origin && !same;

  async function save() {
    if (await section.save({ title: title.trim() }, notebook.revision)) onDone();
  }

  return (
    <form
      noValidate
      className="mb-4"
      onSubmit={(event) => {
        event.preventDefault();
        void save();
      }}
    >
      <Field
        label="Title"
        name="title"
        value={title}
        maxLength={160}
        autoComplete="off"
        onChange={(event) => setTitle(event.target.value)}
        error={detailAt(section.error, 'title')}
        help={
          renamed
            ? `Revision ${notebook.revision} is titled “${notebook.title}” meanwhile. Saving puts yours in its place.`
            : 'A new title makes a new revision; fits stay as they are.'
        }
      />
      <Buttons>
        <Button type="submit" reason={same ? 'As it is.' : title.trim() ? undefined : 'Give it a title.'}>
          Save the title
        </Button>
        <Button onClick={onDone}>Leave it</Button>
      </Buttons>
      {section.conflict ? (
        <Message
          level="warning"
          title={`Revision ${section.conflict.theirs.revision} was saved while you wrote; the title was not`}
        >
          <p>
            {renamed
              ? 'Both titles stand above: save yours in place of theirs, or leave it.'
              : 'It left the title as it was. Nothing of yours is lost: save it again.'}
          </p>
        </Message>
      ) : null}
      <RequestMessage error={section.error} title="The title was not saved" shown={['title']} />
    </form>
  );
}
