import { log } from '@/lib/log';

/** Does something at once and then again after each pause, never twice at a time; returns how to stop. */
export function every(pauseMs: number, act: () => Promise<void>, what: string): () => void {
  let timer: NodeJS.Timeout | undefined;
  let stopped = false;
  const turn = async () => {
    try {
      await act();
    } catch (error) {
      log.warn({ err: error }, `${what} failed for now`);
    }
    if (!stopped) timer = setTimeout(() => void turn(), pauseMs);
  };
  void turn();
  return () => {
    stopped = true;
    clearTimeout(timer);
  };
}
