import { withUser } from '@/lib/http/route';
import { listTemplates } from '@/lib/services/templates';

export const GET = withUser('GET /templates', () => listTemplates());
