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

export interface Sight {
  origin: string;
  notebookId: string;
  fitId: string;
  cookie: string;
  token: string;
  /** Milliseconds between two page loads, and between two reads of the draws, as the page itself does it. */
  pace: { page: number; draws: number };
}

interface Told {
  committedAt: string | null;
  progress: { warmup: number; draws: number };
}

async function timed(measure: Measure, ask: () => Promise<Response>): Promise<void> {
  const begun = performance.now();
  try {
    const answer = await ask();
    await answer.arrayBuffer();
    if (answer.status === 200) measure.add(performance.now() - begun);
    else measure.fail();
  } catch {
    measure.fail();
  }
}

/** Reads the stream of events until `over`, opening it again when it breaks, as a browser does. */
async function listen(sight: Sight, measures: Measures, seen: Seen, over: AbortSignal): Promise<void> {
  let last = '';
  const hear = (data: string) => {
    const { committedAt, progress } = JSON.parse(data) as Told;
    const draws = progress.warmup + progress.draws;
    seen.events += 1;
    if (draws < seen.draws) seen.backwards += 1;
    seen.draws = Math.max(seen.draws, draws);
    // The first state that a viewer is given is as old as it happens to be.
    if (last !== '' && committedAt !== null && committedAt !== last) {
      measures.lag.add(Date.now() - Date.parse(committedAt));
    }
    if (committedAt !== null) last = committedAt;
  };
  while (!over.aborted) {
    try {
      const answer = await fetch(`${sight.origin}/api/v1/fits/${sight.fitId}/events`, {
        headers: { cookie: sight.cookie },
        signal: over,
      });
      if (answer.status !== 200 || !answer.body) throw new Error(`The stream answered ${answer.status}.`);
      let text = '';
      for await (const part of answer.body.pipeThrough(new TextDecoderStream())) {
        text += part;
        const frames = text.split('\n\n');
        text = frames.pop() ?? '';
        for (const frame of frames) {
          const data = /^data: (.*)$/m.exec(frame)?.[1];
          if (data !== undefined) hear(data);
        }
      }
    } catch {
      if (over.aborted) return;
      measures.lag.fail();
    }
    await sleep(1_000, undefined, { signal: over }).catch(() => undefined);
  }
}

/** Does something again and again until `over`, first after a share of its pace so that viewers don't march in step. */
async function repeat(
  pace: number,
  share: number,
  over: AbortSignal,
  act: () => Promise<void>,
): Promise<void> {
  const wait = (milliseconds: number) =>
    sleep(milliseconds, undefined, { signal: over }).catch(() => undefined);
  await wait(pace * share);
  while (!over.aborted) {
    await act();
    await wait(pace * (0.75 + 0.5 * Math.random()));
  }
}

/**
 * One person with the notebook's page open: the page itself now and then, the draws as often as the page asks for them, a
 * script of theirs that asks for fit and notebook with a token, and the stream of events all the time.
 */
export async function view(
  sight: Sight,
  share: number,
  measures: Measures,
  over: AbortSignal,
): Promise<Seen> {
  const { origin, notebookId, fitId, cookie, token, pace } = sight;
  const seen: Seen = { events: 0, backwards: 0, draws: 0 };
  const get = (path: string, headers: Record<string, string>) => fetch(`${origin}${path}`, { headers });
  const bearer = { authorization: `Bearer ${token}` };
  await Promise.all([
    listen(sight, measures, seen, over),
    repeat(pace.page, share, over, () =>
      timed(measures.page, () => get(`/notebooks/${notebookId}`, { cookie, accept: 'text/html' })),
    ),
    repeat(pace.draws, share, over, () =>
      timed(measures.draws, () => get(`/api/v1/fits/${fitId}/draws?max=4000&format=float32`, { cookie })),
    ),
    repeat(pace.page, 1 - share, over, async () => {
      await timed(measures.fit, () => get(`/api/v1/fits/${fitId}`, bearer));
      await timed(measures.notebook, () => get(`/api/v1/notebooks/${notebookId}`, bearer));
    }),
  ]);
  return seen;
}
