import { afterAll, beforeAll, expect, it } from 'vitest';
import { GET as readManifest } from '@/app/api/v1/fits/[id]/manifest/route';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { GET as readMeasurement } from '@/app/api/v1/measurements/[id]/route';
import { measurementSchema, type Manifest } from '@/lib/schemas';
import { storage } from '@/storage';
import { call, closeConnections, errorOf } from './harness';
import { background, fitOf, openDesk, startFit } from './sampling';
import { uploadTo } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
});
afterAll(closeConnections);

const text = `k1 [1/Mpc],k2 [1/Mpc],k3 [1/Mpc],B [Mpc^6],sigma_B
0.2,0.2,0.004,-3.1e-6,1e-6
0.15,0.2,0.08,2.5e-8,1e-9
`;
const file = { name: 'bispectrum.csv', bytes: text };
const spectrum = { amplitude: 2.1e-9, tilt: 0.965, pivot: 0.05 };

it('A bispectrum is stored as S with the spectrum and units it was made by, which every fit freezes', async () => {
  const desk = await openDesk();
  const answer = await uploadTo(desk.group, desk.token, { file, meta: JSON.stringify({ spectrum }) });
  expect(answer.status).toBe(201);
  const { id } = (await answer.json()) as { id: string };
  const read = await call(readMeasurement, { params: { id }, token: desk.token });
  const measurement = measurementSchema.parse(await read.json());
  const used = {
    ...{ ...spectrum, pivotUnit: '1/Mpc', h: null },
    ...{ wavenumberUnit: '1/Mpc', bispectrumUnit: 'Mpc^6' },
  };
  expect(measurement.spectrum).toEqual(used);
  // The formula of docs/measurement-files.md with 40 digits in mpmath.
  const S = [-11.613019685027943, 22.446473736330018];
  measurement.points.S.forEach((value, i) => expect(value! / S[i]).toBeCloseTo(1, 13));
  expect(measurement.points.sigma[1] / (22.446473736330018 / 25)).toBeCloseTo(1, 12);
  const json = {
    title: 'From B',
    measurement: id,
    template: { ...background, options: { background: [1] } },
  };
  const made = await call(createNotebook, { params: { id: desk.group }, token: desk.token, json });
  const fit = await startFit(desk, ((await made.json()) as { id: string }).id, {});
  expect((await fitOf(desk, fit)).snapshot.spectrum).toEqual(used);
  const manifest = await call(readManifest, { params: { id: fit }, token: desk.token });
  const { howToRunAgain } = (await manifest.json()) as Manifest & { howToRunAgain: string[] };
  expect(howToRunAgain.join(' ')).toContain('"spectrum":{"amplitude":2.1e-9,"tilt":0.965,"pivot":0.05');
});

it('A bispectrum without its spectrum is refused with the remedy, and a foreign key in it with its place', async () => {
  const desk = await openDesk();
  const refused = await errorOf(await uploadTo(desk.group, desk.token, { file }));
  expect(refused.message).toContain('A_s');
  expect(refused.details[0].message).toContain('meta.spectrum');
  const meta = JSON.stringify({ spectrum: { ...spectrum, sigma8: 0.8 } });
  const odd = await errorOf(await uploadTo(desk.group, desk.token, { file, meta }));
  expect(odd.details[0].path).toBe('meta.spectrum');
});
