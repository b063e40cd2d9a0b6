import { withUser } from '@/lib/http/route';
import { createGroup } from '@/lib/services/groups';

export const POST = withUser('POST /groups', ({ actor, body }) => createGroup(actor, body));
