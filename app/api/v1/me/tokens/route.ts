import { withUser } from '@/lib/http/route';
import { createOwnToken, listTokens } from '@/lib/services/tokens';

export const GET = withUser('GET /me/tokens', ({ actor }) => listTokens(actor));

export const POST = withUser('POST /me/tokens', ({ actor, tokenId, body }) =>
  createOwnToken({ actor, tokenId }, body),
);
