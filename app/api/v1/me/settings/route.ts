import { withUser } from '@/lib/http/route';
import { changeSettings, readSettings } from '@/lib/services/accounts';

export const GET = withUser('GET /me/settings', ({ actor }) => readSettings(actor));

export const PATCH = withUser('PATCH /me/settings', ({ actor, body }) => changeSettings(actor, body));
