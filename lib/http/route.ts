import { randomBytes } from 'node:crypto';
import type { z } from 'zod';
import type { Actor } from '@/lib/auth/actor';
import { log, pathOf } from '@/lib/log';
import type { Action } from '@/lib/policies';
import { administer, type Administration } from '@/lib/services/administration';
import { authorise, type Access, type RecordKind } from '@/lib/services/access';
import { authenticate, type Authenticated } from './authenticate';
import { errorAnswer, json, translate } from './answer';
import { limitRate } from './rate-limit';
import { parseOrThrow, readJson } from './request';
import { rowOf, type Row, type RouteKey, type routes } from './routes';

type Routes = typeof routes;
type Parsed<R, Part extends string> =
  R extends Record<Part, infer S extends z.ZodType> ? z.output<S> : undefined;
type Answer<K extends RouteKey> = Routes[K] extends { answer: infer S extends z.ZodType }
  ? z.input<S>
  : never;
type KeysFor<P extends Row['permission']> = {
  [K in RouteKey]: Routes[K]['permission'] extends P ? K : never;
}[RouteKey];

/** What every handler is given: the request and its parsed parts. */
export interface Call<K extends RouteKey> {
  request: Request;
  params: Readonly<Record<string, string>>;
  query: Parsed<Routes[K], 'query'>;
  body: Parsed<Routes[K], 'body'>;
}
export type UserCall<K extends RouteKey> = Call<K> & {
  actor: Actor;
  /** The token that proved it; null with a session. */
  tokenId: string | null;
};
export type MemberCall<K extends RouteKey> = UserCall<K> & { access: Access };
export type AdministratorCall<K extends RouteKey> = UserCall<K> & { administration: Administration };

/** A handler answers with what its row's schema describes, or with a response of its own (streams, downloads). */
type Handler<C, K extends RouteKey> = (call: C) => Promise<Answer<K> | Response> | Answer<K> | Response;

interface NextContext {
  params: Promise<Record<string, string | string[] | undefined>>;
}

/** What a route file exports: callable by Next, and open to the tests that audit the whole API. */
export interface Verb {
  (request: Request, context?: NextContext): Promise<Response>;
  readonly route: RouteKey;
  readonly permission: Row['permission'];
}

/** The record that a path is about, by its first folder. */
const recordKinds: Readonly<Record<string, RecordKind>> = {
  groups: 'group',
  measurements: 'measurement',
  notebooks: 'notebook',
  fits: 'fit',
  scans: 'scan',
  checks: 'check',
};

export function recordKindOf(key: RouteKey): RecordKind {
  const folder = key.split('/')[1];
  const kind = recordKinds[folder];
  if (!kind) throw new Error(`${key} asks for a member, but /${folder} names no record of a group.`);
  return kind;
}

interface Outcome {
  response: Response;
  caller: Authenticated | null;
}

async function plainParams(context: NextContext | undefined): Promise<Record<string, string>> {
  const entries = Object.entries((await context?.params) ?? {});
  return Object.fromEntries(
    entries.map(([name, value]) => [name, Array.isArray(value) ? value.join('/') : (value ?? '')]),
  );
}

/** Authenticate, count, authorise, validate, handle, present: every verb of the API goes through here. */
function verb<K extends RouteKey>(
  key: K,
  permission: Row['permission'],
  run: (
    call: Call<K>,
    caller: Authenticated | null,
    allowed: Access | Administration | null,
  ) => Promise<unknown>,
): Verb {
  const row = rowOf(key);

  const allow = (actor: Actor, params: Record<string, string>) => {
    if (permission === 'anyone' || permission === 'user') return null;
    if (permission === 'administrator') return administer(actor);
    return authorise(actor, recordKindOf(key), params.id ?? '', permission);
  };

  const serve = async (request: Request, context: NextContext | undefined, outcome: Partial<Outcome>) => {
    const caller = permission === 'anyone' ? null : await authenticate(request);
    outcome.caller = caller;
    if (caller?.tokenId) {
      await limitRate('request', caller.tokenId);
      if (row.parts) await limitRate('upload', caller.tokenId);
    }
    const params = await plainParams(context);
    const allowed = caller && (await allow(caller.actor, params));
    const given = Object.fromEntries(new URL(request.url).searchParams);
    const call = {
      request,
      params,
      query: row.query && parseOrThrow(row.query, given, 'query'),
      body: row.body && parseOrThrow(row.body, await readJson(request), 'body'),
    } as Call<K>;
    const result = await run(call, caller, allowed);
    if (result instanceof Response) return result;
    // The answer is what its schema says: a field that nobody wrote down there stays private.
    return json(row.answer ? row.answer.parse(result) : result, row.status ?? 200);
  };

  const handle = async (request: Request, context?: NextContext): Promise<Response> => {
    const requestId = randomBytes(6).toString('hex');
    const started = performance.now();
    const outcome: Partial<Outcome> = {};
    let response: Response;
    try {
      response = await serve(request, context, outcome);
    } catch (error) {
      response = errorAnswer(translate(error, requestId));
    }
    response.headers.set('X-Request-Id', requestId);
    log.info(
      {
        requestId,
        method: request.method,
        path: pathOf(new URL(request.url).pathname),
        status: response.status,
        milliseconds: Math.round(performance.now() - started),
        user: outcome.caller?.actor.userId,
        by: outcome.caller ? (outcome.caller.tokenId ? 'token' : 'session') : undefined,
      },
      'request',
    );
    return response;
  };
  return Object.assign(handle, { route: key, permission });
}

/** Open to anyone: `export const GET = withAnyone('GET /health', () => …)`. */
export const withAnyone = <K extends KeysFor<'anyone'>>(key: K, handler: Handler<Call<K>, K>): Verb =>
  verb(key, 'anyone', async (call) => handler(call));

/** Open to whoever is signed in. */
export const withUser = <K extends KeysFor<'user'>>(key: K, handler: Handler<UserCall<K>, K>): Verb =>
  verb(key, 'user', async (call, caller) => handler({ ...call, ...caller! }));

/**
 * Open to members of the record's group whose role allows `action`. It stands in the route file so that the API can be
 * audited by reading the exports; that it is the action of the route's row is checked by the compiler.
 */
export const withMember = <A extends Action, K extends KeysFor<A>>(
  action: A,
  key: K,
  handler: Handler<MemberCall<K>, K>,
): Verb =>
  verb(key, action, async (call, caller, allowed) =>
    handler({ ...call, ...caller!, access: allowed as Access }),
  );

/** Open to site administrators; to anybody else there is nothing here. */
export const withAdministrator = <K extends KeysFor<'administrator'>>(
  key: K,
  handler: Handler<AdministratorCall<K>, K>,
): Verb =>
  verb(key, 'administrator', async (call, caller, allowed) =>
    handler({ ...call, ...caller!, administration: allowed as Administration }),
  );
