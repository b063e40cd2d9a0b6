import { withMember } from '@/lib/http/route';
import { readRevision } from '@/lib/services/notebook-revisions';

export const GET = withMember(
  'notebook.read',
  'GET /notebooks/:id/revisions/:revision',
  ({ access, params }) => readRevision(access, params.revision),
);
