import { log } from '@/lib/log';

export interface EventSink {
  /** Sends one event. To a reader that lags only the newest of each name goes: every event is a full state. */
  send(event: string, data: unknown): void;
  /** Says good-bye; the reader isn't meant to come back at once. */
  end(): void;
}

const heartbeat = 15_000;
const headers = {
  'Content-Type': 'text/event-stream; charset=utf-8',
  'Cache-Control': 'no-cache, no-transform',
  'X-Accel-Buffering': 'no',
  'X-Content-Type-Options': 'nosniff',
};

/** A state that goes to many readers is written once: it is the same object for all of them. */
const written = new WeakMap<object, Map<string, string>>();

function frameOf(event: string, data: unknown): string {
  const write = () => `event: ${event}\ndata: ${JSON.stringify(data)}\n\n`;
  if (typeof data !== 'object' || data === null) return write();
  const known = written.get(data) ?? new Map<string, string>();
  written.set(data, known);
  const frame = known.get(event) ?? write();
  known.set(event, frame);
  return frame;
}

/** A server waits for open answers before it stops, so one stream would hold it up for ever. */
const holder = globalThis as typeof globalThis & { beatnoteStreams?: Set<() => void> };

function openStreams(): Set<() => void> {
  if (!holder.beatnoteStreams) {
    const streams = (holder.beatnoteStreams = new Set());
    process.once('SIGTERM', () => [...streams].forEach((close) => close()));
  }
  return holder.beatnoteStreams;
}

/**
 * An event stream with a heartbeat every 15 s. `start` subscribes, sends the full state from the database and returns
 * how to unsubscribe; that is called once, when the reader leaves, the sink ends or the process is asked to stop.
 */
export function eventStream(signal: AbortSignal, start: (sink: EventSink) => Promise<() => void>): Response {
  const encoder = new TextEncoder();
  const waiting = new Map<string, string>();
  let finish: (tell: boolean) => void = () => undefined;

  const stream = new ReadableStream<Uint8Array>(
    {
      async start(controller) {
        let closed = false;
        let unsubscribe: (() => void) | undefined;
        const write = (text: string) => controller.enqueue(encoder.encode(text));
        const beat = setInterval(() => write(': beat\n\n'), heartbeat);
        const onTerm = () => finish(true);
        const onAbort = () => finish(false);
        finish = (tell) => {
          if (closed) return;
          closed = true;
          clearInterval(beat);
          openStreams().delete(onTerm);
          signal.removeEventListener('abort', onAbort);
          unsubscribe?.();
          if (tell) {
            for (const frame of waiting.values()) write(frame);
            controller.close();
          } else {
            controller.error(new Error('the reader left'));
          }
        };
        openStreams().add(onTerm);
        signal.addEventListener('abort', onAbort);
        if (signal.aborted) return finish(false);

        write('retry: 1000\n\n');
        try {
          const stop = await start({
            send: (event, data) => {
              if (closed) return;
              const frame = frameOf(event, data);
              if ((controller.desiredSize ?? 0) > 0) write(frame);
              else waiting.set(event, frame);
            },
            end: () => finish(true),
          });
          if (closed) stop();
          else unsubscribe = stop;
        } catch (error) {
          log.error({ err: error }, 'an event stream failed to start');
          finish(true);
        }
      },
      pull(controller) {
        for (const [event, frame] of waiting) {
          waiting.delete(event);
          controller.enqueue(encoder.encode(frame));
        }
      },
      cancel() {
        finish(false);
      },
    },
    { highWaterMark: 16 },
  );
  return new Response(stream, { headers });
}
