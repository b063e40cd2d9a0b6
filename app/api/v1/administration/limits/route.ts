import { withAdministrator } from '@/lib/http/route';
import { readFitLimits, setFitLimit } from '@/lib/services/fit-limits';

export const GET = withAdministrator('GET /administration/limits', ({ actor }) => readFitLimits(actor));

export const PATCH = withAdministrator('PATCH /administration/limits', async ({ actor, body }) => {
  await setFitLimit(actor, body);
  return readFitLimits(actor);
});
