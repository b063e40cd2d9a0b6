import { readFileSync, readdirSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { Measurement, MeasurementVersion } from '@/models';
import { config } from '@/lib/config';
import { measurementCreatedSchema, type MeasurementCreated } from '@/lib/schemas';
import { POST as upload } from '@/app/api/v1/groups/[id]/measurements/route';
import { call } from './harness';

const folder = fileURLToPath(new URL('../data/measurements/', import.meta.url));

/** The bytes of a file of tests/data/measurements. */
export const dataFile = (name: string): Buffer => readFileSync(path.join(folder, name));

export const dataLines = (name: string): string[] => dataFile(name).toString('utf8').trimEnd().split('\n');

export type FormPart = string | { name: string; bytes: string | Uint8Array };

/** A form as a browser sends it; a string is a plain field. */
export function formOf(parts: Record<string, FormPart>): FormData {
  const form = new FormData();
  for (const [part, value] of Object.entries(parts)) {
    if (typeof value === 'string') form.append(part, value);
    else form.append(part, new Blob([Buffer.from(value.bytes)]), value.name);
  }
  return form;
}

export const filePart = (name: string) => ({ name, bytes: dataFile(name) });

export const uploadTo = (
  groupId: string,
  token: string,
  parts: Record<string, FormPart>,
): Promise<Response> => call(upload, { params: { id: groupId }, token, body: formOf(parts) });

/** Uploads one of the measurements of tests/data with its mocks. */
export async function uploadData(
  groupId: string,
  token: string,
  file: 'one-field.csv' | 'two-field.csv' | 'null.dat' = 'two-field.csv',
): Promise<MeasurementCreated> {
  const mocks = `${file.split('.')[0]}-mocks.csv`;
  const answer = await uploadTo(groupId, token, { file: filePart(file), mocks: filePart(mocks) });
  if (answer.status !== 201) throw new Error(`The upload answered ${answer.status}: ${await answer.text()}`);
  return measurementCreatedSchema.parse(await answer.json());
}

/** Every file of the objects that the store of this run keeps. */
export const objectFiles = (): string[] =>
  readdirSync(path.join(config().stateFolder, 'objects'), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => path.join(entry.parentPath, entry.name))
    .sort();

/** All that an upload could leave behind: rows and objects. */
export const kept = async () => ({
  measurements: await Measurement.count(),
  versions: await MeasurementVersion.count(),
  objects: objectFiles(),
});
