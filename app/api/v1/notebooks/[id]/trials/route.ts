import { withMember } from '@/lib/http/route';
import { readTrials } from '@/lib/services/trials';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/trials', ({ access }) =>
  readTrials(access),
);
