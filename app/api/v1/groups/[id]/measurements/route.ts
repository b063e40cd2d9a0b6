import { readMultipart } from '@/lib/http/multipart';
import { withMember } from '@/lib/http/route';
import { routes } from '@/lib/http/routes';
import { uploadMeasurement } from '@/lib/services/measurement-upload';

const key = 'POST /groups/:id/measurements';

export const POST = withMember('measurement.upload', key, async ({ access, request }) =>
  uploadMeasurement(access, await readMultipart(request, routes[key].parts)),
);
