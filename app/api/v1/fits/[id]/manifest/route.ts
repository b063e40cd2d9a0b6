import { withMember } from '@/lib/http/route';
import { readManifest } from '@/lib/services/manifest';

export const GET = withMember('fit.read', 'GET /fits/:id/manifest', ({ access }) => readManifest(access));
