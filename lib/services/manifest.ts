import { fitStatusSchema, type Manifest, type Snapshot } from '@/lib/schemas';
import { replicaSeed } from '@/lib/sampler';
import type { Access } from './access';
import { findDraws, type FitSource } from './fit-records';
import { fitModel, specOf } from './fit-model';
import { sampleOutputs } from './samples';

/** Fewest kept draws a replica that a fit can be started with. */
const leastDraws = 100;

/** What a person does, with which program, to get the same bytes again. */
function howToRunAgain({ fit, versions, numbers, snapshot }: FitSource): string[] {
  const { program, node, architecture, seed, replicas } = snapshot;
  const settings = {
    cuts: snapshot.cuts,
    ...(snapshot.also
      ? {
          alsoMeasurements: snapshot.also.map(({ cuts }, k) => ({
            measurement: `MEASUREMENT ${k + 2}`,
            cuts,
          })),
        }
      : {}),
    ...(snapshot.sharedMocks ? { sharedMocks: true } : {}),
    likelihood: snapshot.likelihood,
    template: { id: snapshot.template.id, options: snapshot.template.options },
    priors: snapshot.priors,
  };
  const kept = Math.max(0, fit.draws - snapshot.warmup);
  const outcome =
    kept >= leastDraws
      ? `With that target it makes exactly the ${kept} kept draws a replica that are here.`
      : `It was stopped at ${fit.draws} draws a replica, warm-up included: the first ${fit.draws} of a run again are these.`;
  const uploads = [snapshot, ...(snapshot.also ?? [])].map((frozen, k) => {
    const files = versions[k].files.map(({ part, fileName }) => `${part} = ${fileName}`).join(', ');
    // With mocks their number is counted, with a covariance it has to be told.
    const counted = versions[k].files.some(({ part }) => part === 'mocks');
    const meta = {
      columns: frozen.mapping,
      ...(frozen.spectrum ? { spectrum: givenSpectrum(frozen.spectrum) } : {}),
      ...(counted ? {} : { mockCount: frozen.mockCount ?? undefined }),
    };
    const which = versions.length > 1 ? ` of measurement ${k + 1}` : '';
    return `Upload the files with the checksums under inputs${which} (${files}): POST /api/v1/groups/GROUP/measurements, with meta ${JSON.stringify(meta)}.`;
  });
  const steps = [
    `Install Beatnote ${program} on Node.js ${node}, architecture ${architecture}: draws depend on all three.`,
    ...uploads,
    `Open a notebook on ${versions.length > 1 ? 'the first of these measurements' : 'that measurement'}: POST /api/v1/groups/GROUP/notebooks with a title, the measurement and ${JSON.stringify(settings)}.`,
    `Start the fit: POST /api/v1/notebooks/NOTEBOOK/fits with ${JSON.stringify(runSettings(seed, replicas, kept))}. ${outcome}`,
    'Download the samples: GET /api/v1/fits/FIT/samples?format=csv (or ecsv, parquet, npz); their SHA-256 is the one under outputs.',
  ];
  const angles = circularNames({ numbers, snapshot });
  if (angles.length > 0) {
    steps.push(
      `Means, standard deviations and quantiles of ${angles.join(', ')} are of the angle’s coordinate in (−π, π], not circular ones.`,
    );
  }
  if (fit.message !== null) steps.push(fit.message);
  return steps;
}

/** What a person gives for the same spectrum: what was not needed is left out. */
const givenSpectrum = (spectrum: NonNullable<Snapshot['spectrum']>) =>
  Object.fromEntries(Object.entries(spectrum).filter(([, value]) => value !== null));

/** A target out of reach, so that the run ends with its budget and nowhere else. */
const runSettings = (seed: string, replicas: number, maxDraws: number) => ({
  seed,
  replicas,
  maxDraws: Math.max(maxDraws, leastDraws),
  target: { ess: 1e9 },
});

function circularNames({ numbers, snapshot }: Pick<FitSource, 'numbers' | 'snapshot'>): string[] {
  const { template, priors } = specOf(fitModel(numbers, snapshot));
  return template.parameters
    .filter(({ name, circular }) => circular && priors[name].kind !== 'fixed')
    .map(({ name }) => name);
}

const seedsOf = ({ seed, replicas }: Snapshot): Manifest['seeds'] => ({
  master: seed,
  replicas: Array.from({ length: replicas }, (_, replica) => replicaSeed(seed, replica)),
});

/** What went into the fit of `access` and what came out of it, with checksums. */
export async function readManifest(access: Access): Promise<Manifest> {
  const source = await findDraws(access);
  const { fit, snapshot, versions } = source;
  const { program, node, architecture } = snapshot;
  return {
    fit: { number: fit.number, status: fitStatusSchema.parse(fit.status) },
    snapshot,
    snapshotSha256: fit.snapshotSha256,
    inputs: versions.flatMap(({ files }, k) =>
      files.map(({ part, fileName, bytes, sha256 }) => ({
        part,
        ...(versions.length > 1 ? { measurement: k + 1 } : {}),
        fileName,
        bytes,
        sha256,
      })),
    ),
    outputs: (await sampleOutputs(source)).map(({ format, bytes, sha256 }) => ({
      name: `samples.${format}`,
      bytes,
      sha256,
    })),
    seeds: seedsOf(snapshot),
    versions: { program, node, architecture },
    howToRunAgain: howToRunAgain(source),
  };
}
