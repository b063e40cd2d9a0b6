import { DataTypes } from 'sequelize';
import {
  bytes,
  count,
  id,
  instant,
  json,
  maybe,
  maybeInstant,
  real,
  reference,
  sha256,
  table,
  text,
} from './table';

/** A scan keeps its notebook from being erased: what was looked at counts when a significance is judged. */
export const { up, down } = table(
  'scans',
  {
    id,
    notebook_id: reference('notebooks'),
    group_id: reference('groups', true),
    number: count,
    measurement_version_id: reference('measurement_versions'),
    request: json,
    request_sha256: sha256,
    status: text(16),
    message: maybe(text(1000)),
    progress: { ...real, defaultValue: 0 },
    epoch: { ...count, defaultValue: 0 },
    lease_until: maybeInstant,
    result: { type: DataTypes.TEXT('long'), allowNull: true },
    heights: maybe(bytes),
    plane_heights: maybe(bytes),
    started_by: reference('users'),
    created_at: instant,
    ended_at: maybeInstant,
  },
  { scans_number: ['notebook_id', 'number'], scans_request: ['notebook_id', 'request_sha256'] },
);
