import { withMember } from '@/lib/http/route';
import { createNotebook } from '@/lib/services/notebooks';

export const POST = withMember('notebook.create', 'POST /groups/:id/notebooks', ({ access, body }) =>
  createNotebook(access, body),
);
