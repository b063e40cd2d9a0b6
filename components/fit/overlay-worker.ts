import { MeasurementError, type ParsedTable } from '@/lib/measurements';
import { placedWords } from './overlay';
import { tableOf } from './overlay-table';

export interface OverlayRequest {
  name: string;
  bytes: ArrayBuffer;
}

export type OverlayReply = { table: ParsedTable } | { fault: string };

self.addEventListener('message', ({ data }: MessageEvent<OverlayRequest>) => {
  let reply: OverlayReply;
  try {
    reply = { table: tableOf(new Uint8Array(data.bytes), data.name) };
  } catch (error) {
    if (!(error instanceof MeasurementError)) throw error;
    reply = { fault: placedWords(error.toFinding()) };
  }
  self.postMessage(reply);
});
