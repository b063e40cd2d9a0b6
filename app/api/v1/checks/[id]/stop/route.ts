import { withMember } from '@/lib/http/route';
import { stopCheck } from '@/lib/services/checks';

export const POST = withMember('check.stop', 'POST /checks/:id/stop', ({ access }) => stopCheck(access));
