import type { State } from '@/components/ui/state-word';
import type { FitStatus } from '@/lib/schemas';

const states: Record<FitStatus, State> = {
  queued: { kind: 'wait', word: 'waits its turn' },
  'warming-up': { kind: 'run', word: 'warming up' },
  sampling: { kind: 'run', word: 'sampling' },
  converged: { kind: 'ok', word: 'converged' },
  stopped: { kind: 'bad', word: 'stopped' },
  'budget-spent': { kind: 'warn', word: 'draws used up' },
  failed: { kind: 'bad', word: 'failed' },
};

/** Sign and word of a fit's status. */
export const fitState = (status: FitStatus): State => states[status];

export const isRunning = (status: FitStatus): boolean =>
  status === 'queued' || status === 'warming-up' || status === 'sampling';

/** What a fit is doing or came to, as a sentence's predicate: "Fit 3 …". */
const predicates: Record<FitStatus, string> = {
  queued: 'waits its turn',
  'warming-up': 'is warming up',
  sampling: 'is sampling',
  converged: 'has met the gate',
  stopped: 'was stopped; its draws are kept',
  'budget-spent': 'has used its draws up without meeting the gate',
  failed: 'has failed; the draws up to there are kept',
};

export const fitPredicate = (status: FitStatus): string => predicates[status];
