import { withMember } from '@/lib/http/route';
import { readCheck } from '@/lib/services/checks';

export const GET = withMember('check.read', 'GET /checks/:id', ({ access }) => readCheck(access));
