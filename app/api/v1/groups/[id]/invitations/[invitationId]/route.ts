import { withMember } from '@/lib/http/route';
import { takeBackInvitation } from '@/lib/services/invitations';

export const DELETE = withMember(
  'group.invite',
  'DELETE /groups/:id/invitations/:invitationId',
  ({ access, params }) => takeBackInvitation(access, params.invitationId),
);
