import { withMember } from '@/lib/http/route';
import { deleteNotebook } from '@/lib/services/notebook-archive';
import { patchNotebook, readNotebook } from '@/lib/services/notebooks';

export const GET = withMember('notebook.read', 'GET /notebooks/:id', ({ access }) => readNotebook(access));

export const PATCH = withMember('notebook.edit', 'PATCH /notebooks/:id', ({ access, body }) =>
  patchNotebook(access, body),
);

export const DELETE = withMember('notebook.delete', 'DELETE /notebooks/:id', ({ access }) =>
  deleteNotebook(access),
);
