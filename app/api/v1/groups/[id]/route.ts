import { withMember } from '@/lib/http/route';
import { readGroup, renameGroup } from '@/lib/services/groups';

export const GET = withMember('group.read', 'GET /groups/:id', ({ access }) => readGroup(access));

export const PATCH = withMember('group.rename', 'PATCH /groups/:id', ({ access, body }) =>
  renameGroup(access, body),
);
