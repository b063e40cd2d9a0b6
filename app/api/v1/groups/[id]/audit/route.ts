import { withMember } from '@/lib/http/route';
import { readGroupLog } from '@/lib/services/group-log';

export const GET = withMember('group.audit', 'GET /groups/:id/audit', ({ access, query }) =>
  readGroupLog(access, query),
);
