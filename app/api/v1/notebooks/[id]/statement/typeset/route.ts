import { withMember } from '@/lib/http/route';
import { typesetStatement } from '@/lib/services/statements';

export const POST = withMember('notebook.edit', 'POST /notebooks/:id/statement/typeset', ({ access, body }) =>
  typesetStatement(access, body),
);
