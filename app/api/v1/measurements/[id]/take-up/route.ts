import { withMember } from '@/lib/http/route';
import { takeUpEverywhere } from '@/lib/services/take-up';

export const POST = withMember('notebook.edit', 'POST /measurements/:id/take-up', ({ access, body }) =>
  takeUpEverywhere(access, body),
);
