import { Scan, type NotebookSettings } from '@/models';
import { jointSignificance, type Look } from '@/lib/inference/scan';
import { storedResult } from '@/lib/presenters/scans';
import { scanRequestSchema, scanStatusSchema, type Trial, type Trials } from '@/lib/schemas';
import type { Access } from './access';
import { readDoubles } from './inference-spec';
import { findNotebook, settingsOf } from './notebook-records';
import { emailsOf } from './people';
import { isBlindNotebook } from './measurement-rest';

const doubles = (bytes: Buffer | null): Float64Array | null =>
  bytes && readDoubles(bytes, 'heights of the nulls', bytes.byteLength / 8);

/** What settles the nulls of a scan: the versions of its measurements, and whether their mocks are shared. */
const nullsOf = (
  own: string,
  { also = [], sharedMocks = false }: Pick<NotebookSettings, 'also'> & { sharedMocks?: boolean },
): string => JSON.stringify([own, also.map(({ version }) => version), sharedMocks]);

/** The looks that one scan made, and their heights where they are on the nulls of `standing`. */
function looksOf(scan: Scan, standing: string, by: string): { trial: Trial; look: Look | null }[] {
  const request = scanRequestSchema.parse(scan.request);
  const result = storedResult(scan);
  const shared = nullsOf(scan.measurementVersionId, request) === standing;
  const common = {
    scan: scan.id,
    number: scan.number,
    status: scanStatusSchema.parse(scan.status),
    template: { id: request.template.id, options: request.template.options },
    cuts: request.cuts,
    measurementVersion: request.measurementVersion,
    muMin: request.muMin,
    muMax: request.muMax,
    by,
    at: scan.createdAt.toISOString(),
  };
  const look = (globalP: number | null, bytes: Buffer | null): Look | null =>
    globalP === null ? null : { globalP, heights: shared ? doubles(bytes) : null };
  const one = look(result?.globalP ?? null, scan.heights);
  const plane = result?.plane ?? null;
  const two = look(plane?.globalP ?? null, scan.planeHeights);
  return [
    {
      trial: {
        ...common,
        kind: 'one',
        nulls: result?.nulls ?? request.nulls,
        best: result && [result.best.mu],
        deltaChi2: result?.best.deltaChi2 ?? null,
        localP: result?.localP ?? null,
        globalP: result?.globalP ?? null,
        shared: Boolean(one?.heights),
      },
      look: one,
    },
    ...(plane
      ? [
          {
            trial: {
              ...common,
              kind: 'two' as const,
              nulls: plane.nulls,
              best: plane.best.mu,
              deltaChi2: plane.best.deltaChi2,
              localP: null,
              globalP: plane.globalP,
              shared: Boolean(two?.heights),
            },
            look: two,
          },
        ]
      : []),
  ];
}

/** Everything that the notebook of `access` was scanned with, and what is left of the best of it. */
export async function readTrials(access: Access): Promise<Trials> {
  access.require('notebook.read');
  const notebook = await findNotebook(access);
  const blind = await isBlindNotebook(notebook.id);
  const scans = await Scan.findAll({ where: { notebookId: notebook.id }, order: [['number', 'ASC']] });
  const people = await emailsOf(scans.map(({ startedBy }) => startedBy));
  const standing = nullsOf(notebook.measurementVersionId, await settingsOf(notebook));
  const all = scans.flatMap((scan) =>
    looksOf(scan, standing, people.get(scan.startedBy) ?? 'a former member'),
  );
  const trials = all.map(({ trial }) =>
    blind ? { ...trial, best: null, deltaChi2: null, localP: null, globalP: null } : trial,
  );
  const looks = blind ? [] : all.flatMap(({ look }) => (look ? [look] : []));
  const joint = jointSignificance(looks);
  if (!joint) {
    const statement = blind
      ? 'The measurement is blind: nothing that was found in it is shown.'
      : 'No scan with a global significance has ended yet.';
    return { trials, smallestP: null, globalP: null, nulls: 0, method: 'none', statement };
  }
  return {
    trials,
    smallestP: Math.min(...looks.map(({ globalP }) => globalP)),
    globalP: joint.globalP,
    nulls: joint.nulls,
    method: joint.method,
    statement: statementOf(joint.method, looks.length, joint.nulls, joint.apart),
  };
}

function statementOf(method: Trials['method'], looks: number, nulls: number, apart: number): string {
  if (method === 'none') return 'One look for a signal was made, so there is nothing to correct for.';
  if (method === 'same-nulls') {
    return `${looks} looks for a signal were made. Each of the ${nulls} nulls went through all of them, and the smallest p of the data is compared with the smallest p of every null.`;
  }
  const without = apart === 1 ? 'One look' : `${apart} looks`;
  return `${looks} looks for a signal were made. ${without} can’t be evaluated again on the nulls of the others, because the measurement has another version by now or the fit isn’t linear there; each of them counts in full (Bonferroni), which is never too small.`;
}
