import type { ReactNode } from 'react';
import { formatCount } from '@/lib/figures/format';
import type { ComparedFit } from '@/lib/schemas';
import { withError } from './comparison-words';

type WithError = NonNullable<ComparedFit['logEvidence']>;

/** A dash's place where a number can't be: a word that says so, in the controls' face. */
export function Missing({ children }: { children: ReactNode }) {
  return (
    <span className="inline-block max-w-[24ch] text-left font-controls text-note whitespace-normal text-ink-2">
      {children}
    </span>
  );
}

/** A value with its error below it, and the error's degrees of freedom where they are asked for. */
export function ValueWithError({ of, dof = false }: { of: WithError; dof?: boolean }) {
  // Against itself.
  if (of.value === 0 && of.error === 0) return '0';
  const { value, error } = withError(of);
  return (
    <>
      {value}
      <span className="block text-ink-2">
        {error === null ? (
          'exact'
        ) : (
          <>
            ± {error}
            {dof ? (
              <span className="font-controls text-note"> ({formatCount(Math.round(of.dof))} dof)</span>
            ) : null}
          </>
        )}
      </span>
    </>
  );
}
