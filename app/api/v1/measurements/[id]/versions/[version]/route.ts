import { withMember } from '@/lib/http/route';
import { deleteVersion } from '@/lib/services/measurement-changes';

export const DELETE = withMember(
  'measurement.delete',
  'DELETE /measurements/:id/versions/:version',
  ({ access, params }) => deleteVersion(access, Number(params.version)),
);
