import { count, id, reference, table } from './table';

/** Versions of the further measurements that a notebook rests on as it stands, so that none of them can be deleted. */
export const { up, down } = table(
  'notebook_parts',
  {
    id,
    notebook_id: reference('notebooks', true),
    place: count,
    measurement_version_id: reference('measurement_versions'),
  },
  { notebook_parts_place: ['notebook_id', 'place'] },
);
