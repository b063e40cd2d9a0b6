import { withUser } from '@/lib/http/route';
import { revokeToken } from '@/lib/services/tokens';

export const DELETE = withUser('DELETE /me/tokens/:id', ({ actor, params }) => revokeToken(actor, params.id));
