import { parentPort, workerData } from 'node:worker_threads';
import { performScan, type ScanJobModel } from '@/lib/services/scan-model';
import { yieldToOthers } from '@/lib/niceness';
import { failureOf } from './failure';
import type { ScanThreadAnswer } from './messages';

/** A thread that makes one scan. */
yieldToOthers();
const port = parentPort;
if (!port) throw new Error('This file is the entry of a thread.');
const answer = (message: ScanThreadAnswer) => port.postMessage(message);
try {
  const finished = performScan(workerData as ScanJobModel, (fraction) =>
    answer({ kind: 'progress', fraction }),
  );
  answer({ kind: 'scan', finished });
} catch (error) {
  answer(failureOf(error));
}
