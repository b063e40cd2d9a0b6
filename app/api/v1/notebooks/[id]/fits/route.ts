import { withMember } from '@/lib/http/route';
import { startFit } from '@/lib/services/fits';

export const POST = withMember('fit.start', 'POST /notebooks/:id/fits', ({ access, body }) =>
  startFit(access, body),
);
