import { withMember } from '@/lib/http/route';
import { deleteMeasurement, patchMeasurement } from '@/lib/services/measurement-changes';
import { readMeasurement } from '@/lib/services/measurements';

export const GET = withMember('measurement.read', 'GET /measurements/:id', ({ access, query }) =>
  readMeasurement(access, query.version),
);

export const PATCH = withMember('measurement.edit', 'PATCH /measurements/:id', ({ access, body }) =>
  patchMeasurement(access, body),
);

export const DELETE = withMember('measurement.delete', 'DELETE /measurements/:id', ({ access }) =>
  deleteMeasurement(access),
);
