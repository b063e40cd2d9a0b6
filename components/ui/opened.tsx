'use client';

import { useState, type ReactNode } from 'react';

/** Words that open what is read now and then; it is made when it is opened for the first time. */
export function Opened({ words, children }: { words: ReactNode; children: ReactNode }) {
  const [seen, setSeen] = useState(false);
  return (
    <details className="mb-2" onToggle={(event) => setSeen(seen || event.currentTarget.open)}>
      <summary className="inline-flex min-h-target items-center font-controls text-note text-action underline decoration-1 underline-offset-[3px]">
        {words}
      </summary>
      {seen ? children : null}
    </details>
  );
}
