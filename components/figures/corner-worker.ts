import { cornerSketcher, type CornerSketch } from '@/lib/figures/corner-sketch';

/** What to sketch; draws are sent once, and stay until others come. */
export interface CornerRequest {
  id: number;
  draws: readonly ArrayLike<number>[] | null;
  shown: readonly number[];
}

export type CornerReply = { id: number; sketch: CornerSketch } | { id: number; fault: string };

let sketch = cornerSketcher([]);

self.addEventListener('message', ({ data }: MessageEvent<CornerRequest>) => {
  let reply: CornerReply;
  try {
    if (data.draws) sketch = cornerSketcher(data.draws);
    reply = { id: data.id, sketch: sketch(data.shown) };
  } catch (error) {
    reply = { id: data.id, fault: error instanceof Error ? error.message : String(error) };
  }
  self.postMessage(reply);
});
