import { withMember } from '@/lib/http/route';
import { resumeFit } from '@/lib/services/fits';

export const POST = withMember('fit.resume', 'POST /fits/:id/resume', ({ access }) => resumeFit(access));
