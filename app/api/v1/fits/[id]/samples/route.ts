import { withMember } from '@/lib/http/route';
import { openSamples } from '@/lib/services/samples';

export const GET = withMember('fit.read', 'GET /fits/:id/samples', async ({ access, query }) => {
  const { fileName, contentType, stream } = await openSamples(access, query.format);
  return new Response(stream, {
    headers: {
      'Content-Type': contentType,
      'Content-Disposition': `attachment; filename="${fileName}"`,
      'Cache-Control': 'private, no-store',
      'X-Content-Type-Options': 'nosniff',
    },
  });
});
