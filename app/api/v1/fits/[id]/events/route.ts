import { eventStream } from '@/lib/http/sse';
import { withMember } from '@/lib/http/route';
import { watchFit } from '@/lib/services/fit-events';

export const GET = withMember('fit.read', 'GET /fits/:id/events', ({ access, request }) =>
  eventStream(request.signal, (sink) =>
    watchFit(access, {
      onEvent: (event) => sink.send('fit', event),
      onTrouble: (message) => sink.send('trouble', { message }),
      onEnd: () => sink.end(),
    }),
  ),
);
