import { withMember } from '@/lib/http/route';
import { copyNotebook } from '@/lib/services/notebook-copy';

export const POST = withMember('notebook.create', 'POST /notebooks/:id/copy', ({ access, body }) =>
  copyNotebook(access, body),
);
