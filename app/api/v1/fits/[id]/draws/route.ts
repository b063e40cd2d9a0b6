import { withMember } from '@/lib/http/route';
import { packDraws, readDraws } from '@/lib/services/figure-draws';

export const GET = withMember('fit.read', 'GET /fits/:id/draws', async ({ access, query }) => {
  if (query.format === 'json') return readDraws(access, query.max);
  return new Response(await packDraws(access, query.max), {
    headers: {
      'Content-Type': 'application/octet-stream',
      'Cache-Control': 'private, no-store',
      'X-Content-Type-Options': 'nosniff',
    },
  });
});
