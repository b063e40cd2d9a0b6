import { readdir, readFile } from 'node:fs/promises';
import path from 'node:path';
import { simpleParser } from 'mailparser';
import { config } from '@/lib/config';

/** A message that the local catcher kept. */
export interface CaughtMail {
  id: string;
  to: string;
  subject: string;
  text: string;
  /** Addresses of this instance in the text, to be shown as plain links. */
  links: string[];
  sentAt: string;
}

/** Messages shown at most: the newest. */
const shown = 100;

function linksIn(text: string): string[] {
  const origin = config().url;
  return text.split(/\s+/).filter((word) => word === origin || word.startsWith(`${origin}/`));
}

async function readMessage(folder: string, name: string): Promise<CaughtMail> {
  const mail = await simpleParser(await readFile(path.join(folder, name)));
  const to = mail.to === undefined ? [] : [mail.to].flat();
  const text = mail.text ?? '';
  return {
    id: name.replace(/\.eml$/, ''),
    to: to.map((address) => address.text).join(', '),
    subject: mail.subject ?? '',
    text,
    links: linksIn(text),
    sentAt: (mail.date ?? new Date(0)).toISOString(),
  };
}

/** What the local catcher holds, newest first; null where there is no mailbox: mail goes out, or the pages are served beyond this machine. */
export async function listMailbox(): Promise<CaughtMail[] | null> {
  const folder = config().mailFolder;
  if (folder === null) return null;
  const names = (await readdir(folder).catch(() => [])).filter((name) => name.endsWith('.eml'));
  const newest = names.sort().reverse().slice(0, shown);
  return Promise.all(newest.map((name) => readMessage(folder, name)));
}
