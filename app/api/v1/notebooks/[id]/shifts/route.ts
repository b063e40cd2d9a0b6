import { withMember } from '@/lib/http/route';
import { readShifts } from '@/lib/services/shifts';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/shifts', ({ access }) =>
  readShifts(access),
);
