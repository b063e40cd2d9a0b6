import { afterEach, describe, expect, it, vi } from 'vitest';
import { detailAt, detailsElsewhere, errorOf, send, RequestError } from '@/components/api/request';

const refused = new RequestError(422, 'invalid', 'The body isn’t valid.', [
  { path: 'priors.mu1.lo', message: 'lo must be below hi' },
  { path: 'cuts', message: 'No bin lies inside the cut.' },
  { message: 'about nothing in particular' },
]);

describe('what the API refuses', () => {
  it('is told at the field that it is about, also where the path goes deeper', () => {
    expect(detailAt(refused, 'priors.mu1')).toBe('lo must be below hi');
    expect(detailAt(refused, 'cuts')).toBe('No bin lies inside the cut.');
    expect(detailAt(refused, 'cut')).toBeUndefined();
    expect(detailAt(null, 'cuts')).toBeUndefined();
  });

  it('is told below the form where no field shows it', () => {
    expect(detailsElsewhere(refused, ['cuts', 'priors']).map(({ message }) => message)).toEqual([
      'about nothing in particular',
    ]);
  });

  it('keeps code, message and details of the error body, and tells an answer without one by its number', () => {
    const body = { error: { code: 'too_large', message: 'Too large.', details: [{ message: 'by 1 MB' }] } };
    expect(errorOf(413, body)).toMatchObject({ status: 413, code: 'too_large', message: 'Too large.' });
    expect(errorOf(502, '<html>').message).toContain('502');
  });
});

describe('send', () => {
  afterEach(() => vi.unstubAllGlobals());

  it('throws the error body of an answer that isn’t 2xx', async () => {
    const body = { error: { code: 'stale_revision', message: 'Revision 3 stands now.', details: [] } };
    vi.stubGlobal('fetch', () => Promise.resolve(Response.json(body, { status: 409 })));
    await expect(send('PATCH', '/api/v1/notebooks/x', {})).rejects.toMatchObject({
      status: 409,
      code: 'stale_revision',
    });
  });

  it('says that the server can’t be reached where no answer comes', async () => {
    vi.stubGlobal('fetch', () => Promise.reject(new TypeError('failed')));
    await expect(send('GET', '/api/v1/me')).rejects.toMatchObject({ status: 0, code: 'unreachable' });
  });
});
