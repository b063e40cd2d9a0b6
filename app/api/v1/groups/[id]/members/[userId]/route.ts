import { withMember } from '@/lib/http/route';
import { changeRole, removeMember } from '@/lib/services/members';

export const PATCH = withMember(
  'group.roles',
  'PATCH /groups/:id/members/:userId',
  ({ access, params, body }) => changeRole(access, params.userId, body),
);

export const DELETE = withMember('group.leave', 'DELETE /groups/:id/members/:userId', ({ access, params }) =>
  removeMember(access, params.userId),
);
