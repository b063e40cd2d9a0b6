import { bytes, count, id, reference, table } from './table';

export const { up, down } = table(
  'fit_replicas',
  { id, fit_id: reference('fits', true), replica: count, draws: count, state: bytes },
  { fit_replicas_number: ['fit_id', 'replica'] },
);
