import { Op } from 'sequelize';
import { Fit } from '@/models';
import { presentShifts, type FitPair } from '@/lib/presenters/shifts';
import { snapshotSchema, type Shifts } from '@/lib/schemas';
import type { Access } from './access';
import { isBlindNotebook } from './measurement-rest';

/** How every quantity moved from each fit of the notebook of `access` to the fit that repeats it, newest first. */
export async function readShifts(access: Access): Promise<Shifts> {
  access.require('notebook.read');
  access.require('fit.read');
  const fits = await Fit.findAll({
    where: { notebookId: access.id, repeatsId: { [Op.ne]: null } },
    order: [['number', 'DESC']],
  });
  const repeated = await Fit.findAll({
    where: { id: fits.flatMap(({ repeatsId }) => repeatsId ?? []) },
  });
  const byId = new Map(repeated.map((fit) => [fit.id, fit]));
  const pairs = fits.flatMap((fit): FitPair[] => {
    const old = fit.repeatsId === null ? undefined : byId.get(fit.repeatsId);
    const snapshotOf = (each: Fit) => snapshotSchema.parse(each.snapshot);
    return old
      ? [{ old: { fit: old, snapshot: snapshotOf(old) }, new: { fit, snapshot: snapshotOf(fit) } }]
      : [];
  });
  return presentShifts(pairs, await isBlindNotebook(access.id));
}
