import { withUser } from '@/lib/http/route';
import { evaluateTemplate } from '@/lib/services/templates';

export const POST = withUser('POST /templates/:id/evaluate', ({ params, body }) =>
  evaluateTemplate(params.id, body),
);
