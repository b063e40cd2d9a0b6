import { withAdministrator } from '@/lib/http/route';
import { readInstanceState } from '@/lib/services/instance-state';

export const GET = withAdministrator('GET /administration', ({ administration }) =>
  readInstanceState(administration),
);
