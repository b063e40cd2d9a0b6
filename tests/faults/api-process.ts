import { createServer, type IncomingMessage, type ServerResponse } from 'node:http';
import { Readable } from 'node:stream';
import { buffer } from 'node:stream/consumers';
import type { ReadableStream } from 'node:stream/web';
import { GET as readEvents } from '@/app/api/v1/fits/[id]/events/route';
import { GET as readFit } from '@/app/api/v1/fits/[id]/route';
import { GET as readSamples } from '@/app/api/v1/fits/[id]/samples/route';
import { POST as startFit } from '@/app/api/v1/notebooks/[id]/fits/route';
import { config } from '@/lib/config';

/**
 * The entry of a process of its own that serves what a running fit needs of the API, by the product's own handlers, at
 * BEATNOTE_URL: for tests that kill it. It isn't Next's server; that one needs a build.
 */
const routes = [
  { path: /^\/api\/v1\/notebooks\/([^/]+)\/fits$/, method: 'POST', verb: startFit },
  { path: /^\/api\/v1\/fits\/([^/]+)$/, method: 'GET', verb: readFit },
  { path: /^\/api\/v1\/fits\/([^/]+)\/events$/, method: 'GET', verb: readEvents },
  { path: /^\/api\/v1\/fits\/([^/]+)\/samples$/, method: 'GET', verb: readSamples },
];

async function answer(incoming: IncomingMessage, outgoing: ServerResponse): Promise<void> {
  const url = new URL(incoming.url ?? '/', config().url);
  const route = routes.find(({ path, method }) => method === incoming.method && path.test(url.pathname));
  if (!route) {
    outgoing.writeHead(404).end();
    return;
  }
  const left = new AbortController();
  outgoing.once('close', () => left.abort());
  const headers = new Headers();
  for (const name of ['authorization', 'content-type']) {
    const value = incoming.headers[name];
    if (typeof value === 'string') headers.set(name, value);
  }
  const body = route.method === 'POST' ? new Uint8Array(await buffer(incoming)) : undefined;
  const request = new Request(url, { method: route.method, headers, body, signal: left.signal });
  const id = route.path.exec(url.pathname)?.[1] ?? '';
  const given = await route.verb(request, { params: Promise.resolve({ id }) });
  outgoing.writeHead(given.status, Object.fromEntries(given.headers));
  if (given.body) Readable.fromWeb(given.body as ReadableStream).pipe(outgoing);
  else outgoing.end();
}

const server = createServer((incoming, outgoing) => {
  answer(incoming, outgoing).catch((error: unknown) => outgoing.destroy(error as Error));
});
server.listen(config().port, '127.0.0.1', () => process.stdout.write('listening\n'));
