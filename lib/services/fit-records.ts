import { Fit, MeasurementVersion } from '@/models';
import { AppError, notFound } from '@/lib/errors';
import { workerPlaces } from '@/lib/jobs';
import { presentFit, type FitContext, type QueuePlace } from '@/lib/presenters/fits';
import {
  endedStatuses,
  fitStatusSchema,
  snapshotSchema,
  type Fit as FitAnswer,
  type Snapshot,
} from '@/lib/schemas';
import type { Access } from './access';
import type { StoredNumbers } from './fit-model';
import { placeOf } from './fit-queue';
import { alsoOfFit, measuredTogether } from './measured-together';
import { emailsOf } from './people';
import { isBlindVersion } from './version-lines';

/** The fit of `access`. */
export async function findFit(access: Access): Promise<Fit> {
  const fit = await Fit.findByPk(access.id);
  if (!fit) throw notFound('fit');
  return fit;
}

export async function fitContext(access: Access, fit: Fit): Promise<FitContext> {
  const [people, blind] = await Promise.all([
    emailsOf([fit.startedBy]),
    isBlindVersion(fit.measurementVersionId),
  ]);
  const queue = await queueOf(fit);
  return { startedBy: people.get(fit.startedBy) ?? '', role: access.role, blind, queue };
}

/** Where a fit stands in the queue; null where it runs or has ended. */
export async function queueOf(fit: Fit): Promise<QueuePlace | null> {
  const held = fit.leaseUntil !== null && fit.leaseUntil.getTime() > Date.now();
  if (held || endedStatuses.includes(fitStatusSchema.parse(fit.status))) return null;
  const [standing, places] = await Promise.all([placeOf(fit.id), workerPlaces().catch(() => null)]);
  if (!standing) return null;
  const { place, group, running } = standing;
  return { place, groupRunning: group.running, groupLimit: group.limit, running, places };
}

/** The fit of `access` as its members see it. */
export async function readFit(access: Access): Promise<FitAnswer> {
  access.require('fit.read');
  const fit = await findFit(access);
  return presentFit(fit, await fitContext(access, fit));
}

/** A fit whose draws are to be read, with its snapshot and the numbers that it was made from. */
export interface FitSource {
  fit: Fit;
  snapshot: Snapshot;
  /** Versions of its measurements, the notebook's own first. */
  versions: MeasurementVersion[];
  /** For its parameters; shared mocks aren't read. */
  numbers: StoredNumbers;
}

/** Loads a fit for its draws; `blind` while its measurement is. */
export async function findDraws(access: Access): Promise<FitSource> {
  access.require('fit.read');
  const fit = await findFit(access);
  if (await isBlindVersion(fit.measurementVersionId)) {
    throw new AppError(
      'blind',
      'The measurement is blind: its samples can’t be read before it is unblinded.',
    );
  }
  return readSource(fit);
}

/** A fit with what its draws are read by. For services that have authorised: it asks for nothing itself. */
export async function readSource(fit: Fit): Promise<FitSource> {
  const version = await MeasurementVersion.findByPk(fit.measurementVersionId, { rejectOnEmpty: true });
  const snapshot = snapshotSchema.parse(fit.snapshot);
  const chosen = await alsoOfFit(fit.id, snapshot);
  const { parts, numbers } = await measuredTogether(version, chosen, undefined, 'parameters');
  return { fit, snapshot, versions: parts.map((part) => part.version), numbers };
}
