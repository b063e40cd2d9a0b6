import { limitRate } from '@/lib/http/rate-limit';
import { withMember } from '@/lib/http/route';
import { sendAgain } from '@/lib/services/invitations';

export const POST = withMember(
  'group.invite',
  'POST /groups/:id/invitations/:invitationId/send',
  async ({ access, params }) => {
    await limitRate('invitation', params.invitationId);
    return sendAgain(access, params.invitationId);
  },
);
