'use client';

import { useDropzone } from 'react-dropzone';
import { SelectField } from '@/components/ui/field';
import { fileSize } from '@/components/words/counts';
import { partOptions } from './part-words';
import type { ChosenFile } from './use-preflight';

export interface DropZoneProps {
  files: readonly ChosenFile[];
  onAdd: (files: File[]) => void;
  onPart: (key: string, part: ChosenFile['part']) => void;
  onRemove: (key: string) => void;
  /** Said of each file: "41 lines, read in 12 ms". */
  saidOf: (file: ChosenFile) => string;
}

/** Where files are dropped or chosen; what was dropped is listed in it. */
export function DropZone({ files, onAdd, onPart, onRemove, saidOf }: DropZoneProps) {
  const { getRootProps, getInputProps, open, isDragActive } = useDropzone({
    onDrop: onAdd,
    // The button in it opens the browser's choice; a zone that is a button itself couldn't hold others.
    noClick: true,
    noKeyboard: true,
    multiple: true,
  });
  return (
    <div
      {...getRootProps({
        role: 'group',
        'aria-label': 'Choose or drop files',
        className: `max-w-figure border border-dashed px-[20px] py-[13px] ${isDragActive ? 'border-action bg-paper-sunk' : 'border-rule'}`,
      })}
    >
      <input {...getInputProps({ 'aria-label': 'Files', name: 'files' })} />
      {files.map((chosen) => (
        <div
          key={chosen.key}
          className="mb-1 grid grid-cols-[minmax(0,1fr)_minmax(0,auto)_168px_auto] items-baseline gap-x-3 border-b border-hairline pb-[6px] max-tablet:grid-cols-[minmax(0,1fr)_auto]"
        >
          <span className="font-numbers text-number wrap-anywhere">{chosen.file.name}</span>
          <span className="font-controls text-note text-ink-2 max-tablet:col-span-2 max-tablet:row-start-2">
            {fileSize(chosen.file.size)}
            {saidOf(chosen)}
          </span>
          <div className="max-tablet:row-start-3">
            <SelectField
              hiddenLabel={`What ${chosen.file.name} holds`}
              name={`part-${chosen.key}`}
              value={chosen.part}
              options={partOptions}
              onChange={(event) => onPart(chosen.key, event.target.value as ChosenFile['part'])}
            />
          </div>
          <button
            type="button"
            className="min-h-target font-controls text-note text-action underline decoration-1 underline-offset-[3px] max-tablet:col-start-2 max-tablet:row-start-1"
            onClick={() => onRemove(chosen.key)}
          >
            Leave out<span className="sr-only"> {chosen.file.name}</span>
          </button>
        </div>
      ))}
      <p className="mt-1 mb-0 font-controls text-note text-ink-2">
        {files.length
          ? 'Drop other files here, or '
          : 'Drop the binned points here, with mocks or a covariance, or '}
        <button
          type="button"
          className="text-action underline decoration-1 underline-offset-[3px]"
          onClick={open}
        >
          choose them
        </button>
        . Text with commas, tabs or spaces; points up to 5 MB, mocks up to 64 MB.
      </p>
    </div>
  );
}
