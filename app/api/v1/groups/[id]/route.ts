import { withMember } from '@/lib/http/route';
import { readGroup } from '@/lib/services/groups';

export const GET = withMember('group.read', 'GET /groups/:id', ({ access }) => readGroup(access));
