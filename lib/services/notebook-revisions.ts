import { NotebookRevision } from '@/models';
import { notFound } from '@/lib/errors';
import { presentRevision } from '@/lib/presenters/notebooks';
import type { Notebook as NotebookAnswer, RestoreRevision, Revision } from '@/lib/schemas';
import type { Access } from './access';
import { addRevision } from './notebooks';
import { statementAt } from './statements';
import { measurementsOf } from './measured-together';
import { versionLines } from './version-lines';
import { emailsOf } from './people';

/** One revision of the notebook of `access`; what isn't the number of one is answered as missing. */
async function findRevision(access: Access, number: string): Promise<NotebookRevision> {
  const found = /^[1-9]\d{0,8}$/.test(number)
    ? await NotebookRevision.findOne({ where: { notebookId: access.id, revision: Number(number) } })
    : null;
  if (!found) throw notFound('revision');
  return found;
}

/** A revision of the notebook of `access` with all that it settled. */
export async function readRevision(access: Access, number: string): Promise<Revision> {
  access.require('notebook.read');
  const revision = await findRevision(access, number);
  const [people, statement, versions] = await Promise.all([
    emailsOf([revision.createdBy]),
    statementAt(access.id, revision.revision),
    versionLines((revision.settings.also ?? []).map(({ version }) => version)),
  ]);
  return presentRevision(revision, statement, people, versions);
}

/**
 * Makes an earlier revision's title, settings and words stand again, as a new revision: nothing between is lost. They are settled anew
 * on the notebook's measurement, and refused where they can't be fitted to it any more. `stale_revision` as for an edit.
 */
export async function restoreRevision(
  access: Access,
  number: string,
  body: RestoreRevision,
): Promise<NotebookAnswer> {
  access.require('notebook.edit');
  const earlier = await findRevision(access, number);
  const { cuts, likelihood, template, priors } = earlier.settings;
  const statement = await statementAt(access.id, earlier.revision);
  const further = earlier.settings.also ?? [];
  return addRevision(access, body.revision, earlier.revision, async () => ({
    title: earlier.title,
    statement,
    from: earlier.settings,
    alsoMeasurements: (await measurementsOf({ id: '' }, further))
      .slice(1)
      .map((measurement, k) => ({ measurement, cuts: further[k].cuts })),
    sharedMocks: earlier.settings.sharedMocks ?? false,
    draft: {
      cuts,
      likelihood,
      template: { id: template.id, options: template.options },
      given: {},
      kept: priors,
    },
  }));
}
