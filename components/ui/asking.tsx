'use client';

import { useEffect, useId, useRef, type ReactNode } from 'react';
import { Button, Buttons } from './button';

export interface AskingProps {
  /** Names the object: "Revoke the token “cluster”? Programs that use it are refused at once." */
  question: ReactNode;
  /** What the act is called, and what leaving everything as it is. */
  act: string;
  keep: string;
  onAct: () => void;
  onKeep: () => void;
  /** Given: it is being done, in these words. */
  busy?: ReactNode;
  /** What has to be chosen first, between the question and the buttons. */
  children?: ReactNode;
}

/** Asks in a sentence before something that can't be taken back; it takes the focus, so that it is heard. Escape keeps. */
export function Asking({ question, act, keep, onAct, onKeep, busy, children }: AskingProps) {
  const id = useId();
  const sentence = useRef<HTMLParagraphElement>(null);
  useEffect(() => sentence.current?.focus(), []);
  return (
    <div
      role="group"
      aria-labelledby={id}
      className="my-3 max-w-figure border-l-2 border-warn pl-3"
      onKeyDown={(event) => {
        if (event.key === 'Escape') onKeep();
      }}
    >
      <p id={id} ref={sentence} tabIndex={-1} className="mb-1 outline-none">
        {question}
      </p>
      {children}
      <Buttons>
        <Button onClick={onAct} busy={busy}>
          {act}
        </Button>
        <Button onClick={onKeep}>{keep}</Button>
      </Buttons>
    </div>
  );
}
