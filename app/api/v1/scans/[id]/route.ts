import { withMember } from '@/lib/http/route';
import { readScan } from '@/lib/services/scans';

export const GET = withMember('scan.read', 'GET /scans/:id', ({ access }) => readScan(access));
