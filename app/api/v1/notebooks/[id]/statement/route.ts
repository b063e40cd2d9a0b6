import { withMember } from '@/lib/http/route';
import { readStatement } from '@/lib/services/statements';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/statement', ({ access, query }) =>
  readStatement(access, query.revision),
);
