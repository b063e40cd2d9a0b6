import { withAdministrator } from '@/lib/http/route';
import { endSessions } from '@/lib/services/site-users';

export const DELETE = withAdministrator(
  'DELETE /administration/users/:userId/sessions',
  ({ administration, params }) => endSessions(administration, params.userId),
);
