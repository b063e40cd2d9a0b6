import { withMember } from '@/lib/http/route';
import { invite } from '@/lib/services/invitations';

export const POST = withMember('group.invite', 'POST /groups/:id/invitations', ({ access, body }) =>
  invite(access, body),
);
