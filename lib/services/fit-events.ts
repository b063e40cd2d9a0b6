import { fitChannel } from '@/lib/jobs/fits';
import { log } from '@/lib/log';
import { presentFit } from '@/lib/presenters/fits';
import { subscribe } from '@/lib/redis';
import { endedStatuses, fitEventSchema, type FitEvent } from '@/lib/schemas';
import { authoriseWatcher, isShut, type Access } from './access';
import { findFit, fitContext } from './fit-records';
import { SharedReads } from './shared-reads';

/** Milliseconds between two events of one stream at least, and between two reads that nobody called for. */
const pace = { between: 500, unasked: 2_000 } as const;

const databaseIsAway = 'The database is away; the fit goes on when it is back.';

export interface FitWatcher {
  onEvent(event: FitEvent): void;
  /** The fit can't be read for now, and why, in words; the next event says that it can again. */
  onTrouble(message: string): void;
  /** The fit has ended and its last event was sent, or this person may not read it any more. */
  onEnd(): void;
}

interface Told {
  event: FitEvent;
  text: string;
}

/** Everybody of one role sees the same: they are given the very same event, read, presented and written once. */
const reads = new SharedReads<Told>();

const readEvent = (access: Access): Promise<Told> =>
  reads.read(`${access.id} ${access.role}`, async () => {
    const fit = await findFit(access);
    const event = fitEventSchema.parse(presentFit(fit, await fitContext(access, fit)));
    return { event, text: JSON.stringify(event) };
  });

/**
 * Watches the fit of `access`: its state from the database at once, then whenever it has changed, until it has ended. Workers
 * tell of a commit over Redis; that only makes it quicker, the database is read every two seconds without it. Every read but the
 * first, for which `access` was just given, asks the policies anew. Resolves once the first event was given, with how to stop.
 */
export async function watchFit(access: Access, watcher: FitWatcher): Promise<() => void> {
  access.require('fit.read');
  let stopped = false;
  let timer: NodeJS.Timeout | undefined;
  let unsubscribe: (() => void) | undefined;
  let told = '';
  let toldAt = 0;
  let reading = false;
  let called = false;

  const stop = () => {
    stopped = true;
    clearTimeout(timer);
    unsubscribe?.();
    unsubscribe = undefined;
  };
  const wait = (milliseconds: number) => {
    clearTimeout(timer);
    if (!stopped) timer = setTimeout(() => void turn(), milliseconds);
  };
  const tell = ({ event, text }: Told) => {
    if (text !== told) {
      told = text;
      toldAt = Date.now();
      watcher.onEvent(event);
    }
    if (endedStatuses.includes(event.status)) {
      stop();
      watcher.onEnd();
    }
  };
  const read = async (present: Access) => {
    const event = await readEvent(present);
    if (!stopped) tell(event);
  };
  const turn = async () => {
    reading = true;
    called = false;
    try {
      await read(await authoriseWatcher(access.actor, 'fit', access.id, 'fit.read'));
    } catch (error) {
      if (isShut(error)) {
        stop();
        return watcher.onEnd();
      }
      log.warn({ err: error }, 'a watched fit could not be read for now');
      // Once for each outage; what is told next is told even if nothing has changed.
      if (told !== '' && !stopped) watcher.onTrouble(databaseIsAway);
      told = '';
    }
    reading = false;
    wait(called ? pace.between : pace.unasked);
  };
  const onCommit = () => {
    if (called || stopped) return;
    called = true;
    if (!reading) wait(Math.max(0, toldAt + pace.between - Date.now()));
  };

  // Before the first read, so that no commit falls between the two; not waited for, since Redis may be away.
  void subscribe(fitChannel(access.id), onCommit).then(
    (end) => {
      if (stopped) end();
      else unsubscribe = end;
    },
    (error: unknown) => log.warn({ err: error }, 'a fit is watched without being told of commits'),
  );
  await read(access);
  wait(called ? pace.between : pace.unasked);
  return stop;
}
