import { randomBytes } from 'node:crypto';
import { Group, Membership, Session, User } from '@/models';
import type { Actor } from '@/lib/auth/actor';
import { cookieName } from '@/lib/auth/sessions';
import { config } from '@/lib/config';
import { closeDatabase, database } from '@/lib/db';
import { closeRedis } from '@/lib/redis';
import { createToken as issueToken } from '@/lib/services/tokens';
import { errorBodySchema, type ErrorBody, type Role } from '@/lib/schemas';
import { closeStorage } from '@/storage';

/** Names that no other test has: tests share one database and never clear it. */
export const unique = (word: string): string => `${word}-${randomBytes(5).toString('hex')}`;

export async function createUser(email = `${unique('person')}@example.org`): Promise<Actor> {
  database();
  const user = await User.create({ email, emailVerified: new Date() });
  return { userId: user.id, email };
}

export async function createGroup(name = unique('group')): Promise<string> {
  database();
  return (await Group.create({ name, createdAt: new Date() })).id;
}

export async function createMembership(user: Actor, groupId: string, role: Role): Promise<void> {
  await Membership.create({ groupId, userId: user.userId, role, createdAt: new Date() });
}

/** A new person with a role in a group, and a token of theirs. */
export async function createMember(groupId: string, role: Role): Promise<{ user: Actor; token: string }> {
  const user = await createUser();
  await createMembership(user, groupId, role);
  return { user, token: await createToken(user) };
}

export const createToken = (user: Actor): Promise<string> => issueToken(user.email, 'test');

/** A session as a browser holds it: the value of its Cookie header. */
export async function createSession(user: Actor): Promise<string> {
  const sessionToken = randomBytes(16).toString('hex');
  await Session.create({ userId: user.userId, sessionToken, expires: new Date(Date.now() + 3_600_000) });
  return `${cookieName('session')}=${sessionToken}`;
}

export interface CallOptions {
  method?: string;
  /** Path and query after /api/v1; only the query matters to a handler that is called directly. */
  path?: string;
  params?: Record<string, string>;
  token?: string;
  cookie?: string;
  origin?: string;
  json?: unknown;
  body?: BodyInit;
  headers?: Record<string, string>;
  signal?: AbortSignal;
}

type RouteHandler = (
  request: Request,
  context: { params: Promise<Record<string, string>> },
) => Promise<Response>;

/** Calls a route's exported verb as Next does. */
export function call(verb: RouteHandler, options: CallOptions = {}): Promise<Response> {
  const headers = new Headers(options.headers);
  if (options.token !== undefined) headers.set('authorization', `Bearer ${options.token}`);
  if (options.cookie !== undefined) headers.set('cookie', options.cookie);
  if (options.origin !== undefined) headers.set('origin', options.origin);
  const hasJson = options.json !== undefined;
  if (hasJson) headers.set('content-type', 'application/json');
  const body = hasJson ? JSON.stringify(options.json) : options.body;
  const request = new Request(`${config().url}/api/v1${options.path ?? '/'}`, {
    method: options.method ?? (body === undefined ? 'GET' : 'POST'),
    headers,
    body,
    signal: options.signal,
    ...(body instanceof ReadableStream ? { duplex: 'half' } : {}),
  });
  return verb(request, { params: Promise.resolve(options.params ?? {}) });
}

export async function errorOf(response: Response): Promise<ErrorBody['error'] & { status: number }> {
  return { status: response.status, ...errorBodySchema.parse(await response.json()).error };
}

/** For `afterAll`: lets go of every connection. */
export async function closeConnections(): Promise<void> {
  closeStorage();
  await closeRedis();
  await closeDatabase();
}
