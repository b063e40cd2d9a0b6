import { withMember } from '@/lib/http/route';
import { restoreRevision } from '@/lib/services/notebook-revisions';

export const POST = withMember(
  'notebook.edit',
  'POST /notebooks/:id/revisions/:revision/restore',
  ({ access, params, body }) => restoreRevision(access, params.revision, body),
);
