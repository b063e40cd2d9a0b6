import busboy from 'busboy';
import { AppError } from '@/lib/errors';
import type { PartRule } from './routes';

export interface Part {
  /** Empty where the part came as a plain field. */
  fileName: string;
  bytes: Buffer;
}
export type Parts<N extends string = string> = Partial<Record<N, Part>>;

/** Room for boundaries and the headers of the parts. */
const overhead = 64 * 1024;

const megabytes = (bytes: number): string =>
  bytes >= 1024 * 1024 ? `${bytes / (1024 * 1024)} MB` : `${Math.round(bytes / 1024)} kB`;

const tooLarge = (part: string, limit: number): AppError =>
  new AppError(
    'too_large',
    `The part \`${part}\` is larger than ${megabytes(limit)}, the most that is taken.`,
    [{ path: part, message: `larger than ${megabytes(limit)}` }],
  );

/** Refuses by the length announced, before a byte is read. */
function checkAnnounced(request: Request, rules: Readonly<Record<string, PartRule>>): void {
  const announced = Number(request.headers.get('content-length') ?? 0);
  const most = Object.values(rules).reduce((sum, { limit }) => sum + limit, overhead);
  if (announced <= most) return;
  const each = Object.entries(rules).map(([name, { limit }]) => `\`${name}\` ${megabytes(limit)}`);
  throw new AppError('too_large', `The upload is too large. At most: ${each.join(', ')}.`);
}

function openParser(request: Request, rules: Readonly<Record<string, PartRule>>): busboy.Busboy {
  const type = request.headers.get('content-type') ?? '';
  if (!/^multipart\/form-data\s*;/i.test(type)) {
    throw new AppError('unsupported_media_type', 'This call takes an upload: send multipart/form-data.');
  }
  try {
    return busboy({
      headers: { 'content-type': type },
      defParamCharset: 'utf8',
      limits: {
        parts: 2 * Object.keys(rules).length + 1,
        // A part without a file name is kept as text, so it counts against the largest limit of all.
        fieldSize: Math.max(...Object.values(rules).map(({ limit }) => limit)) + 1,
        headerPairs: 50,
      },
    });
  } catch (error) {
    throw new AppError(
      'bad_request',
      'The Content-Type of the upload can’t be read: its boundary is missing.',
      [],
      {
        cause: error,
      },
    );
  }
}

/** Feeds the body to the parser and stops reading as soon as one of them gives up. */
async function pump(
  body: ReadableStream<Uint8Array>,
  parser: busboy.Busboy,
  failed: () => unknown,
): Promise<void> {
  const reader = body.getReader();
  for (;;) {
    const { done, value } = await reader.read();
    if (done) break;
    const room = parser.write(value);
    if (failed()) {
      reader.cancel().catch(() => undefined);
      return;
    }
    if (!room) await new Promise<void>((resolve) => parser.once('drain', resolve));
  }
  parser.end();
}

/**
 * Reads an upload into memory part by part, counting bytes as they come. Throws `too_large` naming the part and its
 * limit, `invalid` for a part that is unknown, repeated or missing, `bad_request` where the form is cut short.
 */
export async function readMultipart<N extends string>(
  request: Request,
  rules: Readonly<Record<N, PartRule>>,
): Promise<Parts<N>> {
  const parser = openParser(request, rules);
  checkAnnounced(request, rules);
  if (!request.body) throw new AppError('bad_request', 'The upload is empty.');
  const parts: Parts<N> = {};
  let fault: AppError | undefined;

  const open = (name: string): name is N => {
    if (!Object.hasOwn(rules, name)) {
      const known = Object.keys(rules).join(', ');
      fault ??= new AppError(
        'invalid',
        `The upload has an unknown part \`${name}\`. Known parts: ${known}.`,
        [{ path: name, message: 'unknown part' }],
      );
      return false;
    }
    if (Object.hasOwn(parts, name)) {
      fault ??= new AppError('invalid', `The part \`${name}\` came twice. Send it once.`, [
        { path: name, message: 'came twice' },
      ]);
      return false;
    }
    return true;
  };

  parser.on('file', (name, stream, info) => {
    stream.on('error', () => undefined);
    if (!open(name)) return void stream.resume();
    const { limit } = rules[name];
    const chunks: Buffer[] = [];
    let length = 0;
    parts[name] = { fileName: info.filename ?? '', bytes: Buffer.alloc(0) };
    stream.on('data', (chunk: Buffer) => {
      length += chunk.length;
      if (length > limit) fault ??= tooLarge(name, limit);
      else chunks.push(chunk);
    });
    stream.on('end', () => {
      parts[name] = { fileName: info.filename ?? '', bytes: Buffer.concat(chunks) };
    });
  });
  parser.on('field', (name, value, info) => {
    if (!open(name)) return;
    const bytes = Buffer.from(value, 'utf8');
    if (info.valueTruncated || bytes.length > rules[name].limit) fault ??= tooLarge(name, rules[name].limit);
    parts[name] = { fileName: '', bytes };
  });

  await new Promise<void>((resolve, reject) => {
    parser.on('close', resolve);
    parser.on('error', (cause) =>
      reject(new AppError('bad_request', 'The upload was cut short or isn’t a valid form.', [], { cause })),
    );
    pump(request.body!, parser, () => fault).then(() => {
      if (fault) resolve();
    }, reject);
  });
  if (fault) throw fault;
  for (const [name, rule] of Object.entries<PartRule>(rules)) {
    if (rule.required && !Object.hasOwn(parts, name)) {
      throw new AppError('invalid', `The part \`${name}\` is missing. ${rule.summary}`, [
        { path: name, message: 'missing' },
      ]);
    }
  }
  return parts;
}
