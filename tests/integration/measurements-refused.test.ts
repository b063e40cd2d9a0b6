import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { Measurement, MeasurementVersion } from '@/models';
import { POST as uploadRoute } from '@/app/api/v1/groups/[id]/measurements/route';
import { database } from '@/lib/db';
import { mocksLimit, pointsLimit } from '@/lib/schemas';
import { storage } from '@/storage';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { dataLines as lines, filePart, kept, uploadData, uploadTo, type FormPart } from './uploads';

beforeAll(() => void database());
afterAll(closeConnections);

let group: string;
let analyst: Awaited<ReturnType<typeof createMember>>;
beforeEach(async () => {
  group = await createGroup();
  analyst = await createMember(group, 'analyst');
});

const upload = (parts: Record<string, FormPart>, token = analyst.token, id = group) =>
  uploadTo(id, token, parts);

/** The lines of a data file with one of them changed, 1-based. */
const withLine = (name: string, line: number, change: (text: string) => string): FormPart => ({
  name,
  bytes: lines(name)
    .map((text, i) => (i === line - 1 ? change(text) : text))
    .join('\n'),
});
const notPositive = () => {
  const matrix = Array.from({ length: 40 }, (_, i) =>
    Array.from({ length: 40 }, (_, j) => (i === j ? 1 : i + j === 1 ? 2 : 0)).join(' '),
  );
  return { name: 'covariance.txt', bytes: matrix.join('\n') };
};
const two = filePart('two-field.csv');

describe('a bad upload', () => {
  const cases: [string, () => Record<string, FormPart>, { path: string; line?: number; says: RegExp }][] = [
    [
      'a file that is no table',
      () => ({ file: { name: 'points.pdf', bytes: new TextEncoder().encode('%PDF-1.7') } }),
      { path: 'file', says: /Save the table as CSV/ },
    ],
    ['an empty file', () => ({ file: { name: 'empty.csv', bytes: '' } }), { path: 'file', says: /bin/ }],
    [
      'mocks in place of the measurement',
      () => ({ file: filePart('two-field-mocks.csv') }),
      { path: 'file', says: /Hand this file in as/ },
    ],
    [
      'a missing column',
      () => ({ file: withLine('two-field.csv', 2, (text) => text.replace(',S,', ',height,')) }),
      { path: 'file', says: /S/ },
    ],
    [
      'NaN',
      () => ({
        file: withLine('two-field.csv', 7, (text) => text.replace(/,[^,]+,([^,]+)$/, ',NaN,$1')),
      }),
      { path: 'file', line: 7, says: /finite number|leave out the whole row/ },
    ],
    [
      'an upper edge below the lower one',
      () => ({ file: withLine('two-field.csv', 5, (text) => text.replace(/^([^,]+),[^,]+/, '$1,0.001')) }),
      { path: 'file', line: 5, says: /swap the two columns/ },
    ],
    [
      'a covariance that is not positive definite',
      () => ({ file: two, covariance: notPositive() }),
      { path: 'covariance', line: 2, says: /not positive definite.*Estimate it from more mocks/ },
    ],
    [
      'a covariance that is not symmetric',
      () => ({ file: filePart('files/clean.csv'), covariance: filePart('files/cov_asymmetric.txt') }),
      { path: 'covariance', says: /equal elements on both sides/ },
    ],
    [
      'too few mocks',
      () => ({
        file: two,
        mocks: { name: 'few.csv', bytes: lines('two-field-mocks.csv').slice(0, 44).join('\n') },
      }),
      { path: 'mocks', says: /44 mocks for 40 bins.*45 or more/ },
    ],
    [
      'mocks of other bins',
      () => ({ file: two, mocks: filePart('one-field-mocks.csv') }),
      { path: 'mocks', says: /36; the measurement has 40 bins/ },
    ],
    [
      'covariance and mocks together',
      () => ({
        file: filePart('files/clean.csv'),
        covariance: filePart('files/cov_ok.txt'),
        mocks: two,
      }),
      { path: 'covariance', says: /Hand in one of the two/ },
    ],
    ['meta that is no JSON', () => ({ file: two, meta: '{name:' }), { path: 'meta', says: /not valid JSON/ }],
    [
      'an unknown field of meta',
      () => ({ file: two, meta: '{"colour":"red"}' }),
      { path: 'meta', says: /colour/ },
    ],
    [
      'a column that is not there',
      () => ({ file: two, meta: '{"columns":{"kappa":"k","S":"S"}}' }),
      { path: 'file', says: /counted from 0/ },
    ],
    [
      'a blind measurement',
      () => ({ file: two, meta: '{"blind":true}' }),
      { path: 'meta.blind', says: /Blind measurements are not supported in this version/ },
    ],
    [
      'a window of other rows',
      () => ({ file: two, window: { name: 'window.txt', bytes: '0.1 0.2\n0.2 0.3\n1 0\n' } }),
      { path: 'window', says: /two of edges, then one a bin/ },
    ],
    [
      'columns of other rows',
      () => ({ file: two, columns: { name: 'columns.csv', bytes: 'gravity\n1\n2\n' } }),
      { path: 'columns', says: /has 2 rows/ },
    ],
    ['a form without the file', () => ({ meta: '{}' }), { path: 'file', says: /missing/ }],
    ['a part that nobody knows', () => ({ file: two, notes: 'x' }), { path: 'notes', says: /unknown part/ }],
  ];

  it.each(cases)('with %s is refused with place and remedy, and leaves nothing', async (_, parts, place) => {
    const before = await kept();
    const error = await errorOf(await upload(parts()));
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    const told = error.details.find(
      ({ path, message }) => path === place.path && place.says.test(message),
    ) ?? { path: error.details.map(({ path }) => path), message: error.message };
    expect(told.path).toBe(place.path);
    expect(`${error.message} ${told.message}`).toMatch(place.says);
    if (place.line !== undefined) expect(told).toMatchObject({ line: place.line });
    expect(await kept()).toEqual(before);
  });

  it('of 65 MB of mocks is refused while it is still coming, and leaves nothing', async () => {
    const before = await kept();
    const boundary = 'x-boundary-x';
    const head = (part: string) =>
      `--${boundary}\r\nContent-Disposition: form-data; name="${part}"; filename="a.csv"\r\n\r\n`;
    const chunk = Buffer.alloc(1024 * 1024, '1,');
    let sent = 0;
    const body = new ReadableStream<Uint8Array>({
      pull(controller) {
        if (sent === 0) {
          controller.enqueue(Buffer.from(`${head('file')}${two.bytes.toString()}\r\n${head('mocks')}`));
        } else controller.enqueue(chunk);
        sent += 1;
        if (sent > 200) controller.close();
      },
    });
    const started = performance.now();
    const answer = await call(uploadRoute, {
      params: { id: group },
      token: analyst.token,
      body,
      headers: { 'content-type': `multipart/form-data; boundary=${boundary}` },
    });
    expect(await errorOf(answer)).toMatchObject({
      status: 413,
      code: 'too_large',
      details: [{ path: 'mocks', message: 'larger than 64 MB' }],
    });
    expect(sent).toBeLessThan(mocksLimit / chunk.length + 8);
    expect(performance.now() - started).toBeLessThan(10_000);
    expect(await kept()).toEqual(before);
  });

  it('of more than 5 MB of points is refused, and leaves nothing', async () => {
    const before = await kept();
    const answer = await upload({ file: { name: 'large.csv', bytes: Buffer.alloc(pointsLimit + 1, '1') } });
    expect(await errorOf(answer)).toMatchObject({ status: 413, code: 'too_large' });
    expect(await kept()).toEqual(before);
  });

  it('that is no form is 415', async () => {
    const answer = await call(uploadRoute, { params: { id: group }, token: analyst.token, json: {} });
    expect(await errorOf(answer)).toMatchObject({ status: 415, code: 'unsupported_media_type' });
  });

  it('of which a row can’t be written leaves no object either', async () => {
    const before = await kept();
    const create = vi.spyOn(MeasurementVersion, 'create').mockRejectedValueOnce(new Error('no room'));
    expect((await upload({ file: two })).status).toBe(500);
    expect(create).toHaveBeenCalledOnce();
    create.mockRestore();
    expect(await kept()).toEqual(before);
  });

  it('that the object store loses in part is 503, and leaves no row and no object', async () => {
    const before = await kept();
    const { putVerified } = storage();
    const put = vi
      .spyOn(storage(), 'putVerified')
      .mockImplementation((key, bytes) =>
        key.endsWith('/mocks') ? Promise.reject(new Error('gone')) : putVerified(key, bytes),
      );
    const answer = await upload({ file: two, mocks: filePart('two-field-mocks.csv') });
    put.mockRestore();
    expect(await errorOf(answer)).toMatchObject({ status: 503, code: 'unavailable' });
    expect(await kept()).toEqual(before);
  });

  it('of the bytes of a blind measurement is 409, and leaves nothing', async () => {
    const { id } = await uploadData(group, analyst.token);
    await Measurement.update({ blind: true }, { where: { id } });
    const before = await kept();
    const answer = await upload({ file: two, meta: '{"name":"once more"}' });
    expect(await errorOf(answer)).toMatchObject({ status: 409, code: 'blind' });
    expect(await kept()).toEqual(before);
    // In another group the bytes are its own affair.
    const elsewhere = await createGroup();
    const { token } = await createMember(elsewhere, 'lead');
    expect((await upload({ file: two }, token, elsewhere)).status).toBe(201);
  });
});
