'use client';

import { useEffect, useMemo, useRef, useState } from 'react';
import { cornerSketcher, type CornerSketch } from '@/lib/figures/corner-sketch';
import type { CornerReply, CornerRequest } from './corner-worker';

type DrawSet = readonly ArrayLike<number>[];

/** A finished sketch and the draws that it is of. */
export interface Sketched {
  draws: DrawSet;
  sketch: CornerSketch;
}

/**
 * Densities and regions of the shown parameters, made in a worker so that a hundred thousand draws never hold the page up.
 * What was made last stays until the next is there. Where no worker can run (on the server, or none could be loaded),
 * and on paper before the first answer, it is made in place.
 *
 * @param draws keep it the same object while the draws are the same; null for none
 * @returns null before the first answer
 */
export function useCornerSketch(
  draws: DrawSet | null,
  shown: readonly number[],
  printing: boolean,
): Sketched | null {
  const [made, setMade] = useState<Sketched | null>(null);
  const [failed, setFailed] = useState(false);
  const worker = useRef<Worker | null>(null);
  const sent = useRef<DrawSet | null>(null);
  const newest = useRef(0);
  const key = shown.join(' ');

  const wanted = draws !== null;
  useEffect(() => {
    if (!wanted) return;
    const own = new Worker(new URL('./corner-worker.ts', import.meta.url), { type: 'module' });
    worker.current = own;
    own.addEventListener('message', ({ data }: MessageEvent<CornerReply>) => {
      if (data.id !== newest.current) return;
      if ('sketch' in data && sent.current) setMade({ draws: sent.current, sketch: data.sketch });
      else setFailed(true);
    });
    own.addEventListener('error', () => setFailed(true));
    return () => {
      own.terminate();
      worker.current = null;
      sent.current = null;
    };
  }, [wanted]);

  useEffect(() => {
    if (!worker.current || !draws) return;
    const id = ++newest.current;
    performance.mark('corner view asked');
    worker.current.postMessage({
      id,
      draws: sent.current === draws ? null : draws,
      shown: key.split(' ').map(Number),
    } satisfies CornerRequest);
    sent.current = draws;
  }, [draws, key]);

  useEffect(() => {
    if (made) performance.measure('corner view', 'corner view asked');
  }, [made]);

  const inPlace = typeof Worker === 'undefined' || failed || (printing && made === null);
  const here = useMemo(
    () => (inPlace && draws ? { draws, sketch: cornerSketcher(draws)(key.split(' ').map(Number)) } : null),
    [inPlace, draws, key],
  );
  return draws ? (here ?? made) : null;
}
