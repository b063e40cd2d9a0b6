import { withAdministrator } from '@/lib/http/route';
import { readStorageState } from '@/lib/services/instance-state';

export const GET = withAdministrator('GET /administration/storage', ({ administration }) =>
  readStorageState(administration),
);
