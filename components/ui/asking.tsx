'use client';

import { useEffect, useRef, type ReactNode } from 'react';
import { Button, Buttons } from './button';

export interface AskingProps {
  /** Names the object: "Revoke the token “cluster”? Programs that use it are refused at once." */
  question: ReactNode;
  /** What the act is called, and what leaving everything as it is. */
  act: string;
  keep: string;
  onAct: () => void;
  onKeep: () => void;
}

/** Asks in a sentence before something that can't be taken back; it takes the focus, so that it is heard. */
export function Asking({ question, act, keep, onAct, onKeep }: AskingProps) {
  const sentence = useRef<HTMLParagraphElement>(null);
  useEffect(() => sentence.current?.focus(), []);
  return (
    <div className="my-3 max-w-figure border-l-2 border-warn pl-3">
      <p ref={sentence} tabIndex={-1} className="mb-1 outline-none">
        {question}
      </p>
      <Buttons>
        <Button onClick={onAct}>{act}</Button>
        <Button onClick={onKeep}>{keep}</Button>
      </Buttons>
    </div>
  );
}
