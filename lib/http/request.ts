import type { z } from 'zod';
import { AppError } from '@/lib/errors';
import type { ErrorDetail } from '@/lib/schemas';

/** Largest JSON body: ten thousand numbers with room to spare. */
export const jsonLimit = 1024 * 1024;

/** Reads a body to its end, or throws `too_large` as soon as it passes `limit` bytes. */
async function readBytes(request: Request, limit: number): Promise<Buffer> {
  const tooLarge = () => new AppError('too_large', `The body is larger than ${limit} bytes.`);
  if (Number(request.headers.get('content-length') ?? 0) > limit) throw tooLarge();
  if (!request.body) return Buffer.alloc(0);
  const reader = request.body.getReader();
  const chunks: Uint8Array[] = [];
  let length = 0;
  for (;;) {
    const { done, value } = await reader.read();
    if (done) return Buffer.concat(chunks);
    length += value.byteLength;
    if (length > limit) {
      await reader.cancel();
      throw tooLarge();
    }
    chunks.push(value);
  }
}

/** A JSON body; an empty one stands for `{}`, so that a call whose fields are all optional needs none. */
export async function readJson(request: Request): Promise<unknown> {
  const bytes = await readBytes(request, jsonLimit);
  if (bytes.length === 0) return {};
  const type = (request.headers.get('content-type') ?? '').split(';')[0].trim().toLowerCase();
  if (type !== 'application/json') {
    throw new AppError(
      'unsupported_media_type',
      'This call takes JSON: send Content-Type: application/json.',
    );
  }
  try {
    return JSON.parse(bytes.toString('utf8')) as unknown;
  } catch (error) {
    throw new AppError('bad_request', 'The body is not valid JSON.', [
      { message: error instanceof Error ? error.message : 'unreadable' },
    ]);
  }
}

const detailsOf = (error: z.ZodError): ErrorDetail[] =>
  error.issues.map((issue) => ({ path: issue.path.map(String).join('.'), message: issue.message }));

/** Parses what came in, or throws `invalid` with the place of every fault. */
export function parseOrThrow<T extends z.ZodType>(schema: T, value: unknown, what: string): z.output<T> {
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  const details = detailsOf(parsed.error);
  const first = details[0];
  const place = first?.path ? `${first.path}: ` : '';
  throw new AppError('invalid', `The ${what} isn't valid. ${place}${first?.message ?? ''}`.trim(), details);
}
