'use client';

import { useEffect, useRef, useState } from 'react';
import type { ColumnMapping, PowerSpectrum } from '@/lib/measurements';
import type { PreflightReply, PreflightRequest, WorkerFile } from './preflight-worker';
import type { PreflightView } from './preflight-view';

/** A chosen file and what it is taken for. */
export interface ChosenFile {
  key: string;
  part: WorkerFile['part'];
  file: File;
}

export interface Preflight {
  view: PreflightView | null;
  /** True while the newest choice is being read. */
  reading: boolean;
  /** The worker itself failed: not what a file holds. */
  fault: string | null;
}

const nothing: Preflight = { view: null, reading: false, fault: null };

/**
 * Reads and checks the chosen files in a worker, so that 64 MB of mocks never freeze the page. Each file's bytes go over
 * once; a change of meaning or of a column only runs the checks again.
 */
export function usePreflight(
  files: readonly ChosenFile[],
  mapping: ColumnMapping | null,
  mockCount: number | null,
  spectrum: PowerSpectrum | null,
): Preflight {
  const [state, setState] = useState<Preflight>(nothing);
  const worker = useRef<Worker | null>(null);
  const sent = useRef(new Set<string>());
  const newest = useRef(0);

  useEffect(() => {
    const made = new Worker(new URL('./preflight-worker.ts', import.meta.url), { type: 'module' });
    const known = sent.current;
    worker.current = made;
    made.addEventListener('message', ({ data }: MessageEvent<PreflightReply>) => {
      if (data.id !== newest.current) return;
      if ('view' in data) setState({ view: data.view, reading: false, fault: null });
      else setState({ view: null, reading: false, fault: data.fault });
    });
    return () => {
      made.terminate();
      worker.current = null;
      known.clear();
    };
  }, []);

  useEffect(() => {
    const id = ++newest.current;
    const run = async () => {
      if (!files.some(({ part }) => part === 'file')) {
        setState(nothing);
        return;
      }
      setState((before) => ({ ...before, reading: true }));
      const parts = await Promise.all(
        files.map(async ({ key, part, file }): Promise<WorkerFile> => {
          const bytes = sent.current.has(key) ? null : await file.arrayBuffer();
          return { key, part, name: file.name, bytes };
        }),
      );
      if (id !== newest.current || !worker.current) return;
      const transfer: ArrayBuffer[] = [];
      for (const { key, bytes } of parts) {
        if (!bytes) continue;
        sent.current.add(key);
        transfer.push(bytes);
      }
      worker.current.postMessage(
        { id, files: parts, mapping, mockCount, spectrum } satisfies PreflightRequest,
        transfer,
      );
    };
    void run();
  }, [files, mapping, mockCount, spectrum]);

  return state;
}
