import { setTimeout as sleep } from 'node:timers/promises';
import type { Measure, Measures } from './measures';

/** What one viewer saw of the fit that they watch. */
export interface Seen {
  events: number;
  /** Events that told of fewer draws than one before. */
  backwards: number;
  /** Most recorded draws a replica that were told. */
  draws: number;
}

/** A person, and what they look at. */
export interface Sight {
  origin: string;
  notebookId: string;
  fitId: string;
  cookie: string;
  token: string;
}

/** Milliseconds between two things that a viewer does; each wait is drawn evenly from two thirds to four thirds of it. */
export interface Pace {
  /** Between two loads of the page. */
  think: number;
  /** Between two reads of the draws while the page is open: as the page itself does it. */
  draws: number;
}

interface Told {
  committedAt: string | null;
  progress: { warmup: number; draws: number };
}

export type Asked = 'page' | 'fit' | 'draws' | 'notebook';

/** Asks once for one of the things that a viewer asks for, reads the whole answer, and notes how long it took. */
export async function ask(sight: Sight, what: Asked, measure: Measure): Promise<void> {
  const { notebookId, fitId, cookie, token } = sight;
  const session = { cookie };
  const bearer = { authorization: `Bearer ${token}` };
  const [path, headers] = {
    page: [`/notebooks/${notebookId}`, { ...session, accept: 'text/html' }],
    fit: [`/api/v1/fits/${fitId}`, session],
    draws: [`/api/v1/fits/${fitId}/draws?max=4000&format=float32`, session],
    notebook: [`/api/v1/notebooks/${notebookId}`, bearer],
  }[what] as [string, Record<string, string>];
  const begun = performance.now();
  try {
    const answer = await fetch(`${sight.origin}${path}`, { headers });
    await answer.arrayBuffer();
    if (answer.status === 200) measure.add(performance.now() - begun);
    else measure.fail();
  } catch {
    measure.fail();
  }
}

const wait = (milliseconds: number, over: AbortSignal): Promise<unknown> =>
  sleep(milliseconds, undefined, { signal: over }).catch(() => undefined);

/** Reads the page's stream of events until `left`, opening it again when it breaks, as a browser does. */
async function listen(sight: Sight, measures: Measures, seen: Seen, left: AbortSignal): Promise<void> {
  let last = '';
  const hear = (data: string) => {
    const { committedAt, progress } = JSON.parse(data) as Told;
    const draws = progress.warmup + progress.draws;
    seen.events += 1;
    if (draws < seen.draws) seen.backwards += 1;
    seen.draws = Math.max(seen.draws, draws);
    // The first state that a page is given is as old as it happens to be.
    if (last !== '' && committedAt !== null && committedAt !== last) {
      measures.lag.add(Date.now() - Date.parse(committedAt));
    }
    if (committedAt !== null) last = committedAt;
  };
  while (!left.aborted) {
    try {
      const answer = await fetch(
        `${sight.origin}/api/v1/notebooks/${sight.notebookId}/events?fit=${sight.fitId}`,
        { headers: { cookie: sight.cookie }, signal: left },
      );
      if (answer.status !== 200 || !answer.body) throw new Error(`The stream answered ${answer.status}.`);
      let text = '';
      for await (const part of answer.body.pipeThrough(new TextDecoderStream())) {
        text += part;
        const frames = text.split('\n\n');
        text = frames.pop() ?? '';
        for (const frame of frames) {
          const data = /^event: fit\ndata: (.*)$/m.exec(frame)?.[1];
          if (data !== undefined) hear(data);
        }
      }
    } catch {
      if (left.aborted) return;
      measures.lag.fail();
    }
    await wait(1_000, left);
  }
}

/** Looks at the page until `left`: its stream of events, the fit once, the draws again and again, as the page asks for them. */
async function look(sight: Sight, pace: Pace, measures: Measures, seen: Seen, left: AbortSignal) {
  const read = async () => {
    await ask(sight, 'fit', measures.fit);
    while (!left.aborted) {
      await ask(sight, 'draws', measures.draws);
      await wait(pace.draws, left);
    }
  };
  await Promise.all([listen(sight, measures, seen, left), read()]);
}

/**
 * One person with the notebook's page open: loads it, looks at it for the think time, loads it again, which closes the stream and
 * opens another; meanwhile a script of theirs asks for the notebook with a token, as often. `share` from 0 to 1 spreads the
 * first loads of many viewers over the think time, so that they don't march in step.
 */
export async function view(
  sight: Sight,
  pace: Pace,
  share: number,
  measures: Measures,
  over: AbortSignal,
): Promise<Seen> {
  const seen: Seen = { events: 0, backwards: 0, draws: 0 };
  const thought = () => Math.round(pace.think * (2 / 3 + (2 / 3) * Math.random()));
  const visits = async () => {
    await wait(pace.think * share, over);
    while (!over.aborted) {
      await ask(sight, 'page', measures.page);
      const left = AbortSignal.any([over, AbortSignal.timeout(thought())]);
      await look(sight, pace, measures, seen, left);
    }
  };
  const script = async () => {
    await wait(pace.think * (1 - share), over);
    while (!over.aborted) {
      await ask(sight, 'notebook', measures.notebook);
      await wait(thought(), over);
    }
  };
  await Promise.all([visits(), script()]);
  return seen;
}
