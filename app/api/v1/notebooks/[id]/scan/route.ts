import { json } from '@/lib/http/answer';
import { withMember } from '@/lib/http/route';
import { scanSchema } from '@/lib/schemas';
import { hasEnded, startScan } from '@/lib/services/scans';

export const POST = withMember('scan.start', 'POST /notebooks/:id/scan', async ({ access, body }) => {
  const scan = await startScan(access, body);
  return hasEnded(scan) ? scan : json(scanSchema.parse(scan), 202);
});
