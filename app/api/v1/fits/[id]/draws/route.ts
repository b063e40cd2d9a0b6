import { withMember } from '@/lib/http/route';
import { readDraws } from '@/lib/services/samples';

export const GET = withMember('fit.read', 'GET /fits/:id/draws', ({ access, query }) =>
  readDraws(access, query.max),
);
