import { randomUUID } from 'node:crypto';
import { notebookChannel } from '@/lib/jobs/notebooks';
import { log } from '@/lib/log';
import { subscribe } from '@/lib/redis';
import { notebookSchema, type Notebook, type Presence } from '@/lib/schemas';
import { authoriseWatcher, isShut, type Access } from './access';
import {
  endPresence,
  othersPresent,
  presencePace,
  signPresence,
  tellNotebook,
  type NotebookNews,
} from './notebook-presence';
import { readNotebook } from './notebook-records';
import { SharedReads } from './shared-reads';

/** Milliseconds between two reads that nobody called for: while changes are told, and while Redis is away. */
const unasked = { told: 10_000, untold: 2_000 } as const;

/** Milliseconds between two tellings of who else has it open: people come and go by the dozen, and nobody waits for it. */
const betweenPresence = 1_000;

export interface NotebookWatcher {
  /** The whole notebook as this person sees it. */
  onNotebook(notebook: Notebook): void;
  onPresence(presence: Presence): void;
  /** It can't be read for now; once for each outage, and the notebook is told anew after it. */
  onTrouble(message: string): void;
  /** It was deleted, or this person may not read it any more. */
  onEnd(): void;
}

interface Told {
  notebook: Notebook;
  text: string;
}

const databaseIsAway = 'The database is away. What is saved is seen when it is back.';

/** Everybody of one role sees the same notebook: read, presented and written once for all who look. */
const reads = new SharedReads<Told>();

const readShared = (access: Access): Promise<Told> =>
  reads.read(`${access.id} ${access.role}`, async () => {
    const notebook = notebookSchema.parse(await readNotebook(access));
    return { notebook, text: JSON.stringify(notebook) };
  });

/**
 * Watches the notebook of `access`: its state from the database at once, then whenever it has changed. Every read but the first,
 * for which `access` was just given, asks the policies anew, so that a member who was removed sees no more of it. Resolves once the first state was given, with how to stop.
 */
export async function watchNotebook(access: Access, watcher: NotebookWatcher): Promise<() => void> {
  access.require('notebook.read');
  const { actor, id } = access;
  const page = { notebookId: id, userId: actor.userId, pageId: randomUUID() };
  let stopped = false;
  let reading = false;
  /** What was told since the last read began. */
  let called: NotebookNews | null = null;
  let timer: NodeJS.Timeout | undefined;
  let unsubscribe: (() => void) | undefined;
  let toldAt = 0;
  /** When the notebook itself was last read, and not only who is there. */
  let wholeAt = 0;
  const told = { notebook: '', presence: '' };

  const stop = () => {
    if (stopped) return;
    stopped = true;
    clearTimeout(timer);
    clearInterval(signing);
    unsubscribe?.();
    unsubscribe = undefined;
    void endPresence(page);
  };
  const news = (kind: keyof typeof told, text: string): boolean => {
    if (stopped || text === told[kind]) return false;
    told[kind] = text;
    return true;
  };
  const read = async (present: Access, what: NotebookNews) => {
    const [state, others] = await Promise.all([
      what === 'changed' ? readShared(present) : null,
      othersPresent(id, actor.userId),
    ]);
    toldAt = Date.now();
    if (state) wholeAt = toldAt;
    if (state && news('notebook', state.text)) watcher.onNotebook(state.notebook);
    if (news('presence', JSON.stringify(others))) watcher.onPresence({ others });
  };
  const wait = (milliseconds: number, what: NotebookNews) => {
    clearTimeout(timer);
    if (!stopped) timer = setTimeout(() => void turn(what), milliseconds);
  };
  /** When to read next, by what was told since the last time. */
  const next = () => {
    if (called === 'changed') wait(0, 'changed');
    else if (called === 'presence') wait(Math.max(0, toldAt + betweenPresence - Date.now()), 'presence');
    else wait(unsubscribe ? unasked.told : unasked.untold, 'changed');
  };
  const turn = async (what: NotebookNews) => {
    reading = true;
    called = null;
    const due = Date.now() - wholeAt >= unasked.told ? 'changed' : what;
    try {
      await read(await authoriseWatcher(actor, 'notebook', id, 'notebook.read'), due);
    } catch (error) {
      if (isShut(error)) {
        stop();
        watcher.onEnd();
      } else {
        log.warn({ err: error }, 'a watched notebook could not be read for now');
        if (told.notebook !== '' && !stopped) watcher.onTrouble(databaseIsAway);
        told.notebook = '';
      }
    }
    reading = false;
    next();
  };
  const onNews = (message: string) => {
    if (called === 'changed' || stopped) return;
    called = message === 'presence' ? 'presence' : 'changed';
    if (!reading) next();
  };
  const sign = () =>
    signPresence(page, Date.now()).catch((error: unknown) =>
      log.debug({ err: error }, 'an open page was not counted'),
    );
  const signing = setInterval(() => void sign(), presencePace.sign);

  // Before the first read, so that no change falls between the two; not waited for, since Redis may be away.
  void subscribe(notebookChannel(id), onNews).then(
    (end) => {
      if (stopped) end();
      else unsubscribe = end;
    },
    (error: unknown) => log.warn({ err: error }, 'a notebook is watched without being told of changes'),
  );
  void sign().then(() => tellNotebook(id, 'presence'));
  reading = true;
  try {
    await read(access, 'changed');
  } catch (error) {
    stop();
    throw error;
  }
  reading = false;
  next();
  return stop;
}
