'use client';

import { useEffect, useRef, useState } from 'react';
import { Button, Buttons } from '@/components/ui/button';

export interface MadeToken {
  name: string;
  token: string;
}

/** The secret of a token that was just made. It lives in this page's memory only, until it is hidden or left. */
export function NewToken({ made, onHide }: { made: MadeToken; onHide: () => void }) {
  const title = useRef<HTMLHeadingElement>(null);
  const secret = useRef<HTMLElement>(null);
  const [said, setSaid] = useState('');
  useEffect(() => title.current?.focus(), []);

  async function copy() {
    try {
      await navigator.clipboard.writeText(made.token);
      setSaid('Copied.');
    } catch {
      if (secret.current) getSelection()?.selectAllChildren(secret.current);
      setSaid('This browser doesn’t let the page copy. The token is selected: copy it by hand.');
    }
  }

  return (
    <div className="my-4 max-w-figure border-l-2 border-action pl-3">
      <h3 ref={title} tabIndex={-1} className="mb-1 text-subheading outline-none">
        The token “{made.name}”
      </h3>
      <p className="mb-1">
        <code ref={secret} className="font-numbers text-number wrap-anywhere select-all">
          {made.token}
        </code>
      </p>
      <p className="mb-1 text-small text-ink-2">
        It won’t be shown again: only a hash of it is kept here. Whoever holds it can do what you can do.
      </p>
      <Buttons note={<span role="status">{said}</span>}>
        <Button onClick={() => void copy()}>Copy the token</Button>
        <Button onClick={onHide}>Hide it</Button>
      </Buttons>
    </div>
  );
}
