import { DataTypes } from 'sequelize';
import { bytes, count, reference, table } from './table';

export const { up, down } = table(
  'fit_blocks',
  {
    id: { type: DataTypes.BIGINT, primaryKey: true, autoIncrement: true, allowNull: false },
    fit_id: reference('fits', true),
    replica: count,
    first_draw: count,
    stride: count,
    row_count: count,
    width: count,
    draw_values: bytes,
  },
  { fit_blocks_place: ['fit_id', 'replica', 'first_draw'] },
);
