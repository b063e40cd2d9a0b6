import { withMember } from '@/lib/http/route';
import { extendFit } from '@/lib/services/fits';

export const POST = withMember('fit.extend', 'POST /fits/:id/extend', ({ access, body }) =>
  extendFit(access, body),
);
