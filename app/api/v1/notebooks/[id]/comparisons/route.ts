import { withMember } from '@/lib/http/route';
import { startComparison } from '@/lib/services/comparisons';

export const POST = withMember('fit.start', 'POST /notebooks/:id/comparisons', ({ access, body }) =>
  startComparison(access, body),
);
