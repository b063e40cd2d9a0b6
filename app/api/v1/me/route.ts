import { withUser } from '@/lib/http/route';
import { readMe } from '@/lib/services/accounts';

export const GET = withUser('GET /me', ({ actor }) => readMe(actor));
