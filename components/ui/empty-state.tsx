import type { ReactNode } from 'react';
import { Buttons } from './button';

/** One sentence why nothing is there and what comes first, then the buttons. */
export function EmptyState({ children, actions }: { children: ReactNode; actions?: ReactNode }) {
  return (
    <div className="border-t border-ink pt-2">
      <p>{children}</p>
      {actions ? <Buttons>{actions}</Buttons> : null}
    </div>
  );
}
