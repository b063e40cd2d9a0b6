import { withMember } from '@/lib/http/route';
import { stopFit } from '@/lib/services/fits';

export const POST = withMember('fit.stop', 'POST /fits/:id/stop', ({ access }) => stopFit(access));
