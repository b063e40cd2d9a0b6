import type { MeasurementVersion, StoredFile } from '@/models';
import {
  applyMapping,
  parseMatrix,
  parseMeasurement,
  type ColumnMapping,
  type PowerSpectrum,
} from '@/lib/measurements';
import { storage } from '@/storage';
import { sha256Of } from '@/storage/client';

async function stored(
  version: MeasurementVersion,
  part: StoredFile['part'],
): Promise<{ bytes: Buffer; name: string }> {
  const file = version.files.find((each) => each.part === part);
  const bytes = file && (await storage().get(file.key));
  if (!file || !bytes) throw new Error(`The ${part} of version ${version.id} isn’t in the object store.`);
  if ((await sha256Of(bytes)) !== file.sha256) {
    throw new Error(`The ${part} of version ${version.id} isn’t what was uploaded: its checksum differs.`);
  }
  return { bytes, name: file.fileName };
}

/** Whether a version came with its mocks, rather than with a covariance of them. */
export const hasMocks = (version: Pick<MeasurementVersion, 'files'>): boolean =>
  version.files.some(({ part }) => part === 'mocks');

/** What a person gave of the spectrum: what was not needed is left out. */
const given = (spectrum: MeasurementVersion['spectrum']): PowerSpectrum | null =>
  spectrum &&
  (Object.fromEntries(Object.entries(spectrum).filter(([, value]) => value !== null)) as PowerSpectrum);

/** The mocks of a version as they were uploaded: one row each, its bins in ascending κ, in the unit of S. */
export async function readMocks(version: MeasurementVersion): Promise<Float64Array> {
  const [file, mocks] = await Promise.all([stored(version, 'file'), stored(version, 'mocks')]);
  const table = parseMeasurement(file.bytes, file.name);
  const { measurement, conversion } = applyMapping(
    table,
    version.mapping as unknown as ColumnMapping,
    given(version.spectrum),
  );
  const { data, rows, columns } = parseMatrix(mocks.bytes, mocks.name, { part: 'mocks' });
  const order = measurement?.order;
  if (order?.length !== columns || columns !== version.rows) {
    throw new Error(`The mocks of version ${version.id} have ${columns} bins where ${version.rows} are due.`);
  }
  const out = new Float64Array(rows * columns);
  for (let n = 0; n < rows; n += 1) {
    for (let i = 0; i < columns; i += 1) {
      out[n * columns + i] = data[n * columns + order[i]] * (conversion?.factors[order[i]] ?? 1);
    }
  }
  return out;
}
