import { log } from '@/lib/log';
import {
  claimScan,
  commitScan,
  failScan,
  releaseScan,
  renewScan,
  type ClaimedScan,
} from '@/lib/services/scan-lease';
import type { FinishedScan } from '@/lib/services/scan-model';
import { ThreadError } from './failure';
import type { ScanThreadAnswer } from './messages';
import { reasonOf, untilDone } from './retry';
import type { WorkerSettings } from './settings';
import { startThread } from './threads';

/** Milliseconds between two words on how far a scan is. */
const tellEvery = 500;

/** Makes one scan in a thread, if nobody else does; returns when it has ended or isn't this worker's any more. */
export async function runScanJob(scanId: string, settings: WorkerSettings, now: AbortSignal): Promise<void> {
  const claimed = await untilDone('taking a scan', () => claimScan(scanId, settings.leaseMs), now);
  if (!claimed) return;
  const lost = new AbortController();
  const over = AbortSignal.any([now, lost.signal]);
  try {
    const finished = await inThread(claimed, settings, over, () => lost.abort());
    if (finished === null) {
      if (!lost.signal.aborted) await releaseScan(claimed);
      return;
    }
    await untilDone('storing a scan', () => commitScan(claimed, finished), over);
    log.info({ scanId }, 'a scan ended');
  } catch (error) {
    const told = error instanceof ThreadError ? error.failure.told : null;
    log[told === null ? 'error' : 'warn']({ scanId, ...reasonOf(error) }, 'a scan failed');
    const ours = 'An unexpected error ended the scan; it is logged. Start it again to try once more.';
    await untilDone('failing a scan', () => failScan(claimed, told ?? ours), over).catch(() => undefined);
  }
}

/** What the thread found; null where the scan is to be let go. */
function inThread(
  claimed: ClaimedScan,
  { leaseMs }: WorkerSettings,
  over: AbortSignal,
  lose: () => void,
): Promise<FinishedScan | null> {
  return new Promise((resolve, reject) => {
    let fraction = 0;
    const close = (): void => {
      clearInterval(telling);
      over.removeEventListener('abort', letGo);
      void thread.terminate();
    };
    const letGo = (): void => {
      close();
      resolve(null);
    };
    const thread = startThread<ScanThreadAnswer>(
      './scan-thread.mjs',
      claimed.model,
      (message) => {
        if (message.kind === 'progress') {
          fraction = message.fraction;
          return;
        }
        close();
        if (message.kind === 'failure') reject(new ThreadError(message));
        else resolve(owned(message.finished));
      },
      (failure) => {
        close();
        reject(new ThreadError(failure));
      },
    );
    const telling = setInterval(() => {
      renewScan(claimed, leaseMs, fraction)
        .then((held) => {
          if (!held) lose();
        })
        .catch((error: unknown) => log.warn(reasonOf(error), 'a scan’s lease could not be renewed'));
    }, tellEvery);
    over.addEventListener('abort', letGo, { once: true });
  });
}

/** Bytes that came from a thread as buffers again. */
const owned = ({ result, heights, planeHeights }: FinishedScan): FinishedScan => ({
  result,
  heights: heights && Buffer.from(heights),
  planeHeights: planeHeights && Buffer.from(planeHeights),
});
