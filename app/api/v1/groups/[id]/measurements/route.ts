import { readMultipart } from '@/lib/http/multipart';
import { withMember } from '@/lib/http/route';
import { routes } from '@/lib/http/routes';
import { uploadMeasurement } from '@/lib/services/measurement-upload';
import { listMeasurements } from '@/lib/services/measurements';

const key = 'POST /groups/:id/measurements';

export const POST = withMember('measurement.upload', key, async ({ access, request }) =>
  uploadMeasurement(access, await readMultipart(request, routes[key].parts)),
);

export const GET = withMember('measurement.read', 'GET /groups/:id/measurements', ({ access }) =>
  listMeasurements(access),
);
