import { json } from '@/lib/http/answer';
import { withMember } from '@/lib/http/route';
import { notebookCheckSchema } from '@/lib/schemas';
import { hasEnded, listChecks, startCheck } from '@/lib/services/checks';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/checks', ({ access }) =>
  listChecks(access),
);

export const POST = withMember(
  'check.start',
  'POST /notebooks/:id/checks',
  async ({ access, body, query }) => {
    const check = await startCheck(access, body, query.wait);
    return hasEnded(check) ? check : json(notebookCheckSchema.parse(check), 202);
  },
);
