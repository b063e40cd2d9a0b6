import { readMultipart } from '@/lib/http/multipart';
import { withMember } from '@/lib/http/route';
import { routes } from '@/lib/http/routes';
import { uploadVersion } from '@/lib/services/measurement-upload';

const key = 'POST /measurements/:id/versions';

export const POST = withMember('measurement.upload', key, async ({ access, request }) =>
  uploadVersion(access, await readMultipart(request, routes[key].parts)),
);
