import { withMember } from '@/lib/http/route';
import { readFit } from '@/lib/services/fits';

export const GET = withMember('fit.read', 'GET /fits/:id', ({ access }) => readFit(access));
