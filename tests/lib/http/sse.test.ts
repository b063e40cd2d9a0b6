import { describe, expect, it, vi } from 'vitest';
import { eventStream, type EventSink } from '@/lib/http/sse';

const open = (start?: (sink: EventSink) => void) => {
  const controller = new AbortController();
  const unsubscribe = vi.fn();
  let sink: EventSink | undefined;
  const response = eventStream(controller.signal, async (given) => {
    sink = given;
    start?.(given);
    return unsubscribe;
  });
  return { controller, unsubscribe, response, sink: () => sink! };
};

const textOf = (chunk: ReadableStreamReadResult<Uint8Array>) => new TextDecoder().decode(chunk.value);

describe('an event stream', () => {
  it('has headers that no proxy buffers or rewrites', () => {
    const { response, controller } = open();
    expect(response.headers.get('content-type')).toBe('text/event-stream; charset=utf-8');
    expect(response.headers.get('cache-control')).toBe('no-cache, no-transform');
    expect(response.headers.get('x-accel-buffering')).toBe('no');
    controller.abort();
  });

  it('sends events as JSON by name and ends when the sink ends', async () => {
    const { response, unsubscribe } = open((sink) => {
      sink.send('fit', { draws: 1 });
      setTimeout(() => sink.end(), 5);
    });
    expect(await response.text()).toBe('retry: 1000\n\nevent: fit\ndata: {"draws":1}\n\n');
    expect(unsubscribe).toHaveBeenCalledTimes(1);
  });

  it('beats every 15 seconds', async () => {
    vi.useFakeTimers();
    try {
      const { response, controller } = open();
      const reader = response.body!.getReader();
      await reader.read();
      const next = reader.read();
      await vi.advanceTimersByTimeAsync(15_000);
      expect(textOf(await next)).toBe(': beat\n\n');
      reader.cancel().catch(() => undefined);
      controller.abort();
      expect(vi.getTimerCount()).toBe(0);
    } finally {
      vi.useRealTimers();
    }
  });

  it('unsubscribes once when the reader leaves, by abort or by cancelling', async () => {
    const first = open();
    const gone = first.response.text().catch((error: unknown) => error);
    first.controller.abort();
    expect(await gone).toBeInstanceOf(Error);
    await vi.waitFor(() => expect(first.unsubscribe).toHaveBeenCalledTimes(1));

    const second = open();
    await second.response.body!.cancel();
    second.controller.abort();
    await vi.waitFor(() => expect(second.unsubscribe).toHaveBeenCalledTimes(1));
  });

  it('gives a reader that lags the newest state and leaves out those between', async () => {
    const { response, sink } = open();
    await vi.waitFor(() => expect(sink()).toBeDefined());
    for (let draws = 0; draws < 100; draws += 1) sink().send('fit', { draws });
    sink().end();
    const events = (await response.text()).match(/data: .*/g) ?? [];
    expect(events.length).toBeLessThan(20);
    expect(events.at(-1)).toBe('data: {"draws":99}');
  });

  it('ends when the process is asked to stop', async () => {
    const { response, unsubscribe, sink } = open();
    await vi.waitFor(() => expect(sink()).toBeDefined());
    const whole = response.text();
    process.emit('SIGTERM', 'SIGTERM');
    expect(await whole).toBe('retry: 1000\n\n');
    expect(unsubscribe).toHaveBeenCalledTimes(1);
  });
});
