import { eventStream } from '@/lib/http/sse';
import { withMember } from '@/lib/http/route';
import { watchNotebookPage } from '@/lib/services/notebook-page-events';

export const GET = withMember('notebook.read', 'GET /notebooks/:id/events', ({ access, request, query }) =>
  eventStream(request.signal, (sink) => watchNotebookPage(access, query.fit ?? null, sink)),
);
