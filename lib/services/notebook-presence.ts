import { log } from '@/lib/log';
import { notebookChannel } from '@/lib/jobs/notebooks';
import { redis } from '@/lib/redis';
import { emailsOf } from './people';
import { SharedReads } from './shared-reads';

/** Milliseconds between two signs of life of an open page, and after which one without any is taken for closed. */
export const presencePace = { sign: 15_000, gone: 40_000 } as const;

const keyOf = (notebookId: string): string => `present:${notebookId}`;

/** What is told of a notebook: that it was changed, or only that a page was opened or closed. */
export type NotebookNews = 'changed' | 'presence';

/** Tells whoever watches a notebook that something changed; Redis that is away only makes them hear of it later. */
export async function tellNotebook(notebookId: string, news: NotebookNews = 'changed'): Promise<void> {
  try {
    await redis().publish(notebookChannel(notebookId), news);
  } catch (error) {
    log.warn({ notebookId, err: error }, 'a change of a notebook was not told');
  }
}

/** A page that a person has open on a notebook. */
export interface OpenPage {
  notebookId: string;
  userId: string;
  /** Of this page alone: one person may have several. */
  pageId: string;
}

/** Says that a page is open; again every `presencePace.sign`. */
export async function signPresence({ notebookId, userId, pageId }: OpenPage, now: number): Promise<void> {
  const key = keyOf(notebookId);
  await redis()
    .multi()
    .zadd(key, now, `${userId} ${pageId}`)
    .zremrangebyscore(key, 0, now - presencePace.gone)
    .pexpire(key, presencePace.gone)
    .exec();
}

export async function endPresence({ notebookId, userId, pageId }: OpenPage): Promise<void> {
  try {
    await redis().zrem(keyOf(notebookId), `${userId} ${pageId}`);
  } catch (error) {
    log.warn({ notebookId, err: error }, 'a closed page is counted as open until its sign runs out');
    return;
  }
  await tellNotebook(notebookId, 'presence');
}

/** Whoever has a notebook open, by id, with their address: read once for all who look. */
const present = new SharedReads<ReadonlyMap<string, string>>();

async function readPresent(notebookId: string): Promise<ReadonlyMap<string, string>> {
  const pages = await redis().zrangebyscore(keyOf(notebookId), Date.now() - presencePace.gone, '+inf');
  return pages.length ? emailsOf(pages.map((page) => page.split(' ')[0])) : new Map();
}

/** E-mail addresses of the others who have a notebook open, in alphabetical order; empty while Redis is away. */
export async function othersPresent(notebookId: string, userId: string): Promise<string[]> {
  try {
    const all = await present.read(notebookId, () => readPresent(notebookId));
    return [...all].flatMap(([id, email]) => (id === userId ? [] : [email])).sort();
  } catch {
    return [];
  }
}
