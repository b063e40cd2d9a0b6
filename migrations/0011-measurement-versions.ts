import { bytes, count, flag, id, instant, json, maybe, real, reference, sha256, table, text } from './table';

export const { up, down } = table(
  'measurement_versions',
  {
    id,
    measurement_id: reference('measurements', true),
    version: count,
    row_count: count,
    kappa_min: real,
    kappa_max: real,
    has_bin_edges: flag,
    covariance_source: text(16),
    mock_count: maybe(count),
    sha256,
    files: json,
    mapping: json,
    checks: json,
    points: bytes,
    covariance: bytes,
    created_by: reference('users'),
    created_at: instant,
  },
  { measurement_versions_number: ['measurement_id', 'version'] },
);
