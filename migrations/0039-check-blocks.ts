import { DataTypes } from 'sequelize';
import { count, json, reference, table } from './table';

/** What a check has found so far, one row for every few simulated data sets, so that a worker's death loses little. */
export const { up, down } = table(
  'check_blocks',
  {
    id: { type: DataTypes.BIGINT, primaryKey: true, autoIncrement: true, allowNull: false },
    check_id: reference('checks', true),
    first: count,
    found: json,
  },
  { check_blocks_place: ['check_id', 'first'] },
);
