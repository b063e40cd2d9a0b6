import { withAdministrator } from '@/lib/http/route';
import { changeUser } from '@/lib/services/site-users';

export const PATCH = withAdministrator(
  'PATCH /administration/users/:userId',
  ({ administration, params, body }) => changeUser(administration, params.userId, body),
);
