'use client';

import { useRef } from 'react';
import { flushSync } from 'react-dom';
import { Subheading } from '@/components/ui/section';
import { TextField } from '@/components/ui/field';
import type { Notebook } from '@/lib/schemas';
import { statementLimit } from '@/lib/statement/parse-statement';
import { ReferenceMenu } from './reference-menu';
import { StatementWords } from './statement-words';
import type { TypesetDraft } from './use-statement';

const help =
  'An empty line begins a paragraph. A reference such as {mu1 of fit 1} shows that fit’s number; two braces {{ are one.';

/** Writing the words: what is typed above, what will be read below, so that the hand never moves. */
export function StatementEditor({
  notebook,
  text,
  typeset,
  refused,
  onText,
  onShow,
}: {
  notebook: Notebook;
  text: string;
  typeset: TypesetDraft;
  /** What the server said against the words. */
  refused?: string;
  onText: (text: string) => void;
  onShow: (fitId: string) => void;
}) {
  const area = useRef<HTMLTextAreaElement>(null);
  const { told } = typeset;

  function insert(reference: string) {
    const field = area.current;
    if (!field) return;
    const { selectionStart, selectionEnd } = field;
    const caret = selectionStart + reference.length;
    flushSync(() => onText(text.slice(0, selectionStart) + reference + text.slice(selectionEnd)));
    field.focus();
    field.setSelectionRange(caret, caret);
  }

  return (
    <>
      <TextField
        ref={area}
        label="Words"
        name="statement"
        rows={9}
        value={text}
        maxLength={statementLimit}
        onChange={(event) => onText(event.target.value)}
        error={told ? `Line ${told.line}, character ${told.column}: ${told.message}` : refused}
        help={help}
      />
      <div className="mt-3 mb-4">
        <ReferenceMenu notebook={notebook} onInsert={insert} />
      </div>
      <Subheading>As it will be read</Subheading>
      {typeset.paragraphs.length ? (
        <StatementWords paragraphs={typeset.paragraphs} onShow={onShow} />
      ) : (
        <p className="mb-3 text-lead text-ink-2">No words yet.</p>
      )}
    </>
  );
}
