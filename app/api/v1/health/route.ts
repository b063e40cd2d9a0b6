import { withAnyone } from '@/lib/http/route';
import { readHealth } from '@/lib/services/health';

export const dynamic = 'force-dynamic';

export const GET = withAnyone('GET /health', () => readHealth());
