import { count, id, reference, table } from './table';

/** Versions of the further measurements that a fit was made from. */
export const { up, down } = table(
  'fit_parts',
  {
    id,
    fit_id: reference('fits', true),
    place: count,
    measurement_version_id: reference('measurement_versions'),
  },
  { fit_parts_place: ['fit_id', 'place'] },
);
