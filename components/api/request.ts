import type { ErrorBody, ErrorDetail } from '@/lib/schemas';
import { tellSessionEnd } from './session';

/** What the API said against a request, in its own words; `status` 0 where no answer came. */
export class RequestError extends Error {
  override readonly name = 'RequestError';

  constructor(
    readonly status: number,
    readonly code: string,
    message: string,
    readonly details: readonly ErrorDetail[] = [],
  ) {
    super(message);
  }
}

function isErrorBody(body: unknown): body is ErrorBody {
  return (
    typeof body === 'object' &&
    body !== null &&
    'error' in body &&
    typeof (body as ErrorBody).error?.message === 'string'
  );
}

/** The error that an answer stands for; an answer that isn't of the API (a proxy's page) is told by its number. */
export function errorOf(status: number, body: unknown): RequestError {
  if (isErrorBody(body)) {
    const { code, message, details } = body.error;
    return new RequestError(status, code, message, details ?? []);
  }
  return new RequestError(status, 'unknown', `The server answered ${status} without saying why.`);
}

export const unreachable = () =>
  new RequestError(
    0,
    'unreachable',
    'The server can’t be reached. Nothing was changed; try again in a moment.',
  );

export function asRequestError(error: unknown): RequestError {
  return error instanceof RequestError ? error : unreachable();
}

/** Asks the API; an answer that isn't 2xx is thrown as a RequestError. */
export async function send<T>(
  method: 'GET' | 'POST' | 'PATCH' | 'DELETE',
  path: string,
  body?: unknown,
  signal?: AbortSignal,
): Promise<T> {
  let response: Response;
  try {
    response = await fetch(path, {
      method,
      headers: body === undefined ? undefined : { 'Content-Type': 'application/json' },
      body: body === undefined ? undefined : JSON.stringify(body),
      signal,
    });
  } catch {
    throw unreachable();
  }
  const answer: unknown = await response.json().catch(() => null);
  if (response.status === 401) tellSessionEnd();
  if (!response.ok) throw errorOf(response.status, answer);
  return answer as T;
}

/** Asks for what stands at a path; an answer that isn't wanted any more is let go by its signal. */
export const read = <T>(path: string, signal?: AbortSignal): Promise<T> =>
  send<T>('GET', path, undefined, signal);

/** Asks the API for bytes; an answer that isn't 2xx is thrown as a RequestError. */
export async function readBytes(path: string): Promise<ArrayBuffer> {
  const response = await fetch(path).catch(() => {
    throw unreachable();
  });
  if (!response.ok) throw errorOf(response.status, await response.json().catch(() => null));
  return response.arrayBuffer();
}

/** Sends a form with files; `onProgress` hears the share that has left, 0 to 1 (`fetch` can't tell). */
export function upload<T>(path: string, form: FormData, onProgress: (share: number) => void): Promise<T> {
  return new Promise((resolve, reject) => {
    const request = new XMLHttpRequest();
    request.open('POST', path);
    request.responseType = 'json';
    request.upload.onprogress = ({ lengthComputable, loaded, total }) => {
      if (lengthComputable && total > 0) onProgress(loaded / total);
    };
    request.onload = () => {
      if (request.status === 401) tellSessionEnd();
      if (request.status >= 200 && request.status < 300) resolve(request.response as T);
      else reject(errorOf(request.status, request.response));
    };
    request.onerror = () => reject(unreachable());
    request.onabort = () => reject(unreachable());
    request.send(form);
  });
}

/** What was said about one field: the detail whose path is `path`, or lies below it. */
export function detailAt(error: RequestError | null, path: string): string | undefined {
  const found = error?.details.find(
    (detail) =>
      detail.path === path || detail.path?.startsWith(`${path}.`) || detail.path?.startsWith(`${path}[`),
  );
  return found?.message;
}

/** Details that none of the given fields shows, so that nothing said goes unseen. */
export function detailsElsewhere(error: RequestError | null, paths: readonly string[]): ErrorDetail[] {
  return (error?.details ?? []).filter(
    ({ path }) =>
      path === undefined ||
      !paths.some((known) => path === known || path.startsWith(`${known}.`) || path.startsWith(`${known}[`)),
  );
}
