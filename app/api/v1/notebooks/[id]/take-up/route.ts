import { withMember } from '@/lib/http/route';
import { takeUpVersion } from '@/lib/services/take-up';

export const POST = withMember('notebook.edit', 'POST /notebooks/:id/take-up', ({ access, body }) =>
  takeUpVersion(access, body),
);
