import type { ReactNode } from 'react';
import { StateWord } from './state-word';

/** Stands beside the result that it limits; several in a row share their rules. */
export function Caution({ children }: { children: ReactNode }) {
  return (
    <div className="caution my-3 grid max-w-figure grid-cols-[92px_1fr] gap-x-2 border-y border-hairline pt-[10px] pb-[9px] text-small max-tablet:grid-cols-1">
      <StateWord kind="warn">Caution</StateWord>
      <div className="min-w-0 [&>p]:mb-0">{children}</div>
    </div>
  );
}
