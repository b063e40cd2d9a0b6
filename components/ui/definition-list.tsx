import type { ReactNode } from 'react';

/** Label and value in two columns with hairlines. */
export function DefinitionList({ entries }: { entries: { term: ReactNode; text: ReactNode }[] }) {
  return (
    <dl className="m-0 grid max-w-figure grid-cols-[132px_1fr] text-small max-tablet:grid-cols-1">
      {entries.map((entry, i) => (
        <div key={i} className="contents">
          <dt className="border-b border-hairline pt-[6px] pb-1 text-ink-2 max-tablet:border-0 max-tablet:pb-0">
            {entry.term}
          </dt>
          <dd className="m-0 border-b border-hairline pt-[6px] pb-1 max-tablet:pt-0">{entry.text}</dd>
        </div>
      ))}
    </dl>
  );
}
