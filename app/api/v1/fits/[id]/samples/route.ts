import { withMember } from '@/lib/http/route';
import { openSamples } from '@/lib/services/samples';

export const GET = withMember('fit.read', 'GET /fits/:id/samples', async ({ access }) => {
  const { fileName, stream } = await openSamples(access);
  return new Response(stream, {
    headers: {
      'Content-Type': 'text/csv; charset=utf-8',
      'Content-Disposition': `attachment; filename="${fileName}"`,
      'Cache-Control': 'private, no-store',
      'X-Content-Type-Options': 'nosniff',
    },
  });
});
