import { withMember } from '@/lib/http/route';
import { invite, listInvitations } from '@/lib/services/invitations';

export const GET = withMember('group.invite', 'GET /groups/:id/invitations', ({ access }) =>
  listInvitations(access),
);

export const POST = withMember('group.invite', 'POST /groups/:id/invitations', ({ access, body }) =>
  invite(access, body),
);
