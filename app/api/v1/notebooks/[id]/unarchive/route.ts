import { withMember } from '@/lib/http/route';
import { unarchiveNotebook } from '@/lib/services/notebook-archive';

export const POST = withMember('notebook.archive', 'POST /notebooks/:id/unarchive', ({ access }) =>
  unarchiveNotebook(access),
);
