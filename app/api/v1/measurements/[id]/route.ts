import { withMember } from '@/lib/http/route';
import { readMeasurement } from '@/lib/services/measurements';

export const GET = withMember('measurement.read', 'GET /measurements/:id', ({ access }) =>
  readMeasurement(access),
);
