import { describe, expect, it } from 'vitest';
import { AppError } from '@/lib/errors';
import { readMultipart } from '@/lib/http/multipart';

const rules = {
  file: { limit: 5 * 1024 * 1024, required: true, summary: 'The points.' },
  mocks: { limit: 64 * 1024 * 1024, summary: 'The mocks.' },
  meta: { limit: 64 * 1024, summary: 'JSON.' },
};

const post = (body: BodyInit, headers: Record<string, string> = {}) =>
  new Request('http://127.0.0.1/', {
    method: 'POST',
    headers,
    body,
    ...(body instanceof ReadableStream ? { duplex: 'half' } : {}),
  });

function form(parts: Record<string, Blob | string>): FormData {
  const data = new FormData();
  for (const [name, value] of Object.entries(parts)) {
    if (typeof value === 'string') data.append(name, value);
    else data.append(name, value, `${name}.csv`);
  }
  return data;
}

const blob = (bytes: number) => new Blob([new Uint8Array(bytes).fill(65)]);

async function fault(request: Request): Promise<AppError> {
  const result: unknown = await readMultipart(request, rules).catch((error: unknown) => error);
  expect(result).toBeInstanceOf(AppError);
  return result as AppError;
}

describe('an upload', () => {
  it('comes as bytes with file names, and as text where a part has no file name', async () => {
    const meta = JSON.stringify({ name: 'κ' });
    const parts = await readMultipart(post(form({ file: new Blob(['a,b\r\n1,2\r\n']), meta })), rules);
    expect(parts.file?.bytes.toString()).toBe('a,b\r\n1,2\r\n');
    expect(parts.file?.fileName).toBe('file.csv');
    expect(parts.meta).toEqual({ fileName: '', bytes: Buffer.from(meta) });
    expect(parts.mocks).toBeUndefined();
  });

  it('keeps a file name in other letters than ASCII', async () => {
    const data = new FormData();
    data.append('file', new Blob(['x']), 'Données κ.csv');
    expect((await readMultipart(post(data), rules)).file?.fileName).toBe('Données κ.csv');
  });

  it('takes exactly the limit and refuses one byte more, naming part and limit', async () => {
    const { limit } = rules.file;
    expect((await readMultipart(post(form({ file: blob(limit) })), rules)).file?.bytes).toHaveLength(limit);
    const error = await fault(post(form({ file: blob(limit + 1) })));
    expect(error).toMatchObject({ code: 'too_large', status: 413, details: [{ path: 'file' }] });
    expect(error.message).toContain('`file`');
    expect(error.message).toContain('5 MB');
  });

  it('is refused by its announced length before a byte is read', async () => {
    let pulled = 0;
    const body = new ReadableStream<Uint8Array>(
      {
        pull(controller) {
          pulled += 1;
          controller.enqueue(new Uint8Array(1024));
        },
      },
      { highWaterMark: 0 },
    );
    const headers = {
      'content-type': 'multipart/form-data; boundary=x',
      'content-length': String(200 * 1024 * 1024),
    };
    const error = await fault(post(body, headers));
    expect(error.status).toBe(413);
    expect(error.message).toContain('`mocks` 64 MB');
    expect(pulled).toBe(0);
  });

  it('stops being read once a part passes its limit, whatever length was announced', async () => {
    const head = '--x\r\nContent-Disposition: form-data; name="mocks"; filename="m.csv"\r\n\r\n';
    const chunk = new Uint8Array(1024 * 1024).fill(49);
    let sent = 0;
    let cancelled = false;
    const body = new ReadableStream<Uint8Array>(
      {
        start: (controller) => controller.enqueue(new TextEncoder().encode(head)),
        pull(controller) {
          sent += 1;
          if (sent > 1000) controller.close();
          else controller.enqueue(chunk);
        },
        cancel() {
          cancelled = true;
        },
      },
      { highWaterMark: 1 },
    );
    const error = await fault(post(body, { 'content-type': 'multipart/form-data; boundary=x' }));
    expect(error).toMatchObject({ code: 'too_large', details: [{ path: 'mocks' }] });
    expect(cancelled).toBe(true);
    expect(sent).toBeLessThan(70);
  });

  it('answers 415 for another content type and 400 without a boundary', async () => {
    expect((await fault(post('{}', { 'content-type': 'application/json' }))).status).toBe(415);
    expect((await fault(post('a,b', { 'content-type': 'text/csv' }))).status).toBe(415);
    expect((await fault(post('x', { 'content-type': 'multipart/form-data; charset=x' }))).status).toBe(400);
  });

  it('answers 400 where the form is cut short', async () => {
    const cut = '--x\r\nContent-Disposition: form-data; name="file"; filename="a.csv"\r\n\r\n1,2';
    const error = await fault(post(cut, { 'content-type': 'multipart/form-data; boundary=x' }));
    expect(error.code).toBe('bad_request');
  });

  it('answers 422 naming a part that is unknown, repeated or missing', async () => {
    const unknown = await fault(post(form({ file: blob(1), picture: blob(1) })));
    expect(unknown).toMatchObject({
      code: 'invalid',
      details: [{ path: 'picture', message: 'unknown part' }],
    });
    const twice = form({ file: blob(1) });
    twice.append('file', blob(1), 'again.csv');
    expect(await fault(post(twice))).toMatchObject({ code: 'invalid', details: [{ path: 'file' }] });
    const missing = await fault(post(form({ meta: '{}' })));
    expect(missing).toMatchObject({ code: 'invalid', details: [{ path: 'file', message: 'missing' }] });
  });
});
