import { duration } from './counts';

/** Steps of a time that is told, in seconds: each holds below its bound. */
const steps = [
  { below: 20, step: 5 },
  { below: 60, step: 10 },
  { below: 180, step: 30 },
  { below: 600, step: 60 },
  { below: 5_400, step: 300 },
  { below: Infinity, step: 600 },
] as const;

const stepAt = (seconds: number): number => (steps.find(({ below }) => seconds < below) ?? steps[0]).step;

/** The nearest time that is told, no finer than it can be known: 5, 10, 15, 20, 30 s … 3 min, 4 min … 1 h 30 min. */
function rounded(seconds: number): number {
  const step = stepAt(seconds);
  return Math.max(steps[0].step, Math.round(seconds / step) * step);
}

/** What was told of the time left, and from what. */
export interface TimeTold {
  /** Of which fit, or whatever else it is. */
  of: string;
  /** What is shown, in seconds: one of the steps. */
  shown: number;
  /** The estimate, evened out, and the latest one as it was given. */
  seconds: number;
  given: number;
  /** When it was given, in milliseconds. */
  at: number;
}

/** Seconds over which estimates are evened out. */
const evenedOver = 8;

/** A change by more than this factor is news, and told at once. */
const news = 2;

/** Parts of a step by which the time must be off before another is shown: less on the way down, which is where it goes. */
const slack = { down: 0.75, up: 1.25 } as const;

/**
 * What is told next of the time left. Estimates waver: they are evened out about a time that runs down by itself, and what is
 * shown stays until it is off by the better part of a step, so that it goes down step by step and doesn't flicker between two.
 */
export function tellTime(before: TimeTold | null, next: Pick<TimeTold, 'of' | 'given' | 'at'>): TimeTold {
  const { given, at } = next;
  const afresh = { ...next, shown: rounded(given), seconds: given };
  if (!before || before.of !== next.of) return afresh;
  const passed = Math.max(0, at - before.at) / 1_000;
  const due = Math.max(0, before.seconds - passed);
  if (given > news * Math.max(due, steps[0].step) || due > news * Math.max(given, steps[0].step))
    return afresh;
  const seconds = due + (given - due) * (1 - Math.exp(-passed / evenedOver));
  const down = before.shown - slack.down * stepAt(before.shown - 1);
  const up = before.shown + slack.up * stepAt(before.shown);
  const stays = seconds > down && seconds < up;
  return { ...next, shown: stays ? before.shown : rounded(seconds), seconds };
}

/** "about 40 s", "about 3 min", "about 1 h 20 min". */
export const timeInWords = ({ shown }: Pick<TimeTold, 'shown'>): string => `about ${duration(shown)}`;

/** The same of a time that is told once. */
export const about = (seconds: number): string => timeInWords({ shown: rounded(seconds) });
