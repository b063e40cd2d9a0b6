import { withAdministrator } from '@/lib/http/route';
import { listSiteUsers } from '@/lib/services/site-users';

export const GET = withAdministrator('GET /administration/users', ({ administration, query }) =>
  listSiteUsers(administration, query),
);
