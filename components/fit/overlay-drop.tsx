'use client';

import { useState, type ReactNode } from 'react';
import { useDropzone } from 'react-dropzone';
import { Message } from '@/components/ui/message';
import { WordButton } from '@/components/ui/word-button';
import type { ParsedTable } from '@/lib/measurements';
import { OverlayError } from './overlay';
import type { OverlayReply, OverlayRequest } from './overlay-worker';

/** Reads a table away from the page, so that 50 MB of samples don't hold it up. */
function readTable(file: File): Promise<ParsedTable> {
  return new Promise((resolve, reject) => {
    const worker = new Worker(new URL('./overlay-worker.ts', import.meta.url), { type: 'module' });
    const end = (settle: () => void) => {
      worker.terminate();
      settle();
    };
    worker.addEventListener('message', ({ data }: MessageEvent<OverlayReply>) =>
      end(() => ('table' in data ? resolve(data.table) : reject(new OverlayError(data.fault)))),
    );
    worker.addEventListener('error', () =>
      end(() => reject(new OverlayError('The file could not be read. Choose it again.'))),
    );
    void file.arrayBuffer().then(
      (bytes) => worker.postMessage({ name: file.name, bytes } satisfies OverlayRequest, [bytes]),
      () => end(() => reject(new OverlayError('The browser could not open the file. Choose it again.'))),
    );
  });
}

export interface OverlayDropProps {
  /** "a curve (κ, S)" */
  what: string;
  /** Name of what lies over the figure; null for nothing. */
  laid: string | null;
  /** Takes what was read; throws OverlayError where it doesn't fit. */
  onTable: (table: ParsedTable, name: string) => void;
  onClear: () => void;
  /** The figure, which files may be dropped on. */
  children: ReactNode;
}

/** A figure on which a file can be dropped; what it holds is drawn here and stored nowhere. */
export function OverlayDrop({ what, laid, onTable, onClear, children }: OverlayDropProps) {
  const [fault, setFault] = useState<{ name: string; words: string } | null>(null);
  const [reading, setReading] = useState(false);

  async function take([file]: File[]) {
    if (!file) return;
    setFault(null);
    setReading(true);
    try {
      onTable(await readTable(file), file.name);
    } catch (error) {
      if (!(error instanceof OverlayError)) throw error;
      setFault({ name: file.name, words: error.message });
    } finally {
      setReading(false);
    }
  }

  const { getRootProps, getInputProps, open, isDragActive } = useDropzone({
    onDrop: (files) => void take(files),
    noClick: true,
    noKeyboard: true,
    multiple: false,
  });
  return (
    <div {...getRootProps({ className: isDragActive ? 'outline outline-dashed outline-action' : '' })}>
      <input {...getInputProps({ 'aria-label': `Lay ${what} over the figure` })} />
      {children}
      <p className="no-print -mt-2 mb-3 font-controls text-note text-ink-2">
        {laid ? (
          <>
            {laid} lies over it, in this browser alone.{' '}
            <WordButton onClick={onClear} of={laid}>
              Take it off
            </WordButton>
          </>
        ) : reading ? (
          'Reading the file…'
        ) : (
          <>
            <WordButton onClick={open}>Lay {what} over it</WordButton>
            <span className="max-tablet:hidden">, or drop the file here</span>. It stays in this browser.
          </>
        )}
      </p>
      {fault ? (
        <Message level="error" title={`${fault.name} can’t be laid over the figure`}>
          <p>{fault.words}</p>
        </Message>
      ) : null}
    </div>
  );
}
