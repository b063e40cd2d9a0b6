import { randomUUID } from 'node:crypto';
import { AppError } from '@/lib/errors';
import { notebookChannel } from '@/lib/jobs/notebooks';
import { log } from '@/lib/log';
import { subscribe } from '@/lib/redis';
import { notebookSchema, type Notebook, type Presence } from '@/lib/schemas';
import { authorise, type Access } from './access';
import { endPresence, othersPresent, presencePace, signPresence, tellNotebook } from './notebook-presence';
import { readNotebook } from './notebook-records';
import { SharedReads } from './shared-reads';

/** Milliseconds between two reads that nobody called for: while changes are told, and while Redis is away. */
const unasked = { told: 10_000, untold: 2_000 } as const;

export interface NotebookWatcher {
  /** The whole notebook as this person sees it. */
  onNotebook(notebook: Notebook): void;
  onPresence(presence: Presence): void;
  /** It was deleted, or this person may not read it any more. */
  onEnd(): void;
}

const shut = (error: unknown): boolean =>
  error instanceof AppError && (error.code === 'not_found' || error.code === 'forbidden');

/** Everybody of one role sees the same notebook, read and presented once for all who look. */
const reads = new SharedReads<Notebook>();

const readShared = (access: Access): Promise<Notebook> =>
  reads.read(`${access.id} ${access.role}`, async () => notebookSchema.parse(await readNotebook(access)));

/**
 * Watches the notebook of `access`: its state from the database at once, then whenever it has changed. Every read asks the
 * policies anew, so that a member who was removed sees no more of it. Resolves once the first state was given, with how to stop.
 */
export async function watchNotebook(access: Access, watcher: NotebookWatcher): Promise<() => void> {
  access.require('notebook.read');
  const { actor, id } = access;
  const page = { notebookId: id, userId: actor.userId, pageId: randomUUID() };
  let stopped = false;
  let reading = false;
  let called = false;
  let timer: NodeJS.Timeout | undefined;
  let unsubscribe: (() => void) | undefined;
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
  const news = (kind: keyof typeof told, value: unknown): boolean => {
    const text = JSON.stringify(value);
    if (stopped || text === told[kind]) return false;
    told[kind] = text;
    return true;
  };
  const read = async () => {
    const present = await authorise(actor, 'notebook', id, 'notebook.read');
    const [notebook, others] = await Promise.all([
      readShared(present),
      othersPresent(id, actor.userId, Date.now()),
    ]);
    if (news('notebook', notebook)) watcher.onNotebook(notebook);
    if (news('presence', others)) watcher.onPresence({ others });
  };
  const turn = async () => {
    clearTimeout(timer);
    reading = true;
    called = false;
    try {
      await read();
    } catch (error) {
      if (shut(error)) {
        stop();
        watcher.onEnd();
      } else log.warn({ err: error }, 'a watched notebook could not be read for now');
    }
    reading = false;
    if (stopped) return;
    timer = setTimeout(() => void turn(), called ? 0 : unsubscribe ? unasked.told : unasked.untold);
  };
  const onChange = () => {
    called = true;
    if (!reading && !stopped) void turn();
  };
  const sign = () =>
    signPresence(page, Date.now()).catch((error: unknown) =>
      log.debug({ err: error }, 'an open page was not counted'),
    );
  const signing = setInterval(() => void sign(), presencePace.sign);

  // Before the first read, so that no change falls between the two; not waited for, since Redis may be away.
  void subscribe(notebookChannel(id), onChange).then(
    (end) => {
      if (stopped) end();
      else unsubscribe = end;
    },
    (error: unknown) => log.warn({ err: error }, 'a notebook is watched without being told of changes'),
  );
  void sign().then(() => tellNotebook(id));
  try {
    await read();
  } catch (error) {
    stop();
    throw error;
  }
  timer = setTimeout(() => void turn(), called ? 0 : unasked.untold);
  return stop;
}
