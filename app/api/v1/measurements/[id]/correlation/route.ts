import { withMember } from '@/lib/http/route';
import { readCorrelation } from '@/lib/services/measurements';

export const GET = withMember('measurement.read', 'GET /measurements/:id/correlation', ({ access, query }) =>
  readCorrelation(access, query.version),
);
