import { withMember } from '@/lib/http/route';
import { archiveNotebook } from '@/lib/services/notebook-archive';

export const POST = withMember('notebook.archive', 'POST /notebooks/:id/archive', ({ access }) =>
  archiveNotebook(access),
);
