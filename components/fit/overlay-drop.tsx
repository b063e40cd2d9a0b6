'use client';

import { useRef, useState, type DragEvent, type ReactNode } from 'react';
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

const holdsFiles = ({ dataTransfer }: DragEvent): boolean => dataTransfer.types.includes('Files');

/**
 * A figure on which a file can be dropped; what it holds is drawn here and stored nowhere. One file of any kind: the browser's
 * own events are enough, and the upload page's drop zone would be a tenth of the notebook page's script.
 */
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

  const input = useRef<HTMLInputElement>(null);
  const [over, setOver] = useState(false);
  return (
    <div
      className={over ? 'outline outline-dashed outline-action' : ''}
      onDragOver={(event) => {
        if (!holdsFiles(event)) return;
        event.preventDefault();
        setOver(true);
      }}
      onDragLeave={(event) => {
        if (!event.currentTarget.contains(event.relatedTarget as Node | null)) setOver(false);
      }}
      onDrop={(event) => {
        if (!holdsFiles(event)) return;
        event.preventDefault();
        setOver(false);
        void take([...event.dataTransfer.files]);
      }}
    >
      <input
        ref={input}
        type="file"
        hidden
        aria-label={`Lay ${what} over the figure`}
        onChange={(event) => {
          const chosen = [...(event.target.files ?? [])];
          // The same file can be chosen again.
          event.target.value = '';
          void take(chosen);
        }}
      />
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
            <WordButton onClick={() => input.current?.click()}>Lay {what} over it</WordButton>
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
