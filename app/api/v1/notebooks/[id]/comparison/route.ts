import { withMember } from '@/lib/http/route';
import { readComparison } from '@/lib/services/comparison-table';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/comparison', ({ access }) =>
  readComparison(access),
);
