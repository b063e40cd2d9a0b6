'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import { Button, Buttons } from '@/components/ui/button';
import { Subheading } from '@/components/ui/section';
import { DataTable } from '@/components/ui/table';
import { counted, fileSize } from '@/components/words/counts';
import { noValue } from '@/lib/figures/format';
import type { Fit, Manifest, SampleFormat } from '@/lib/schemas';
import { isRunning } from './fit-words';

const formats: readonly { format: SampleFormat; name: string; purpose: string }[] = [
  { format: 'csv', name: 'CSV', purpose: 'Text with one line of names; any program reads it.' },
  { format: 'ecsv', name: 'ECSV', purpose: 'The same text, with types, units and meanings in its header.' },
  { format: 'parquet', name: 'Parquet', purpose: 'Binary, by column; for data frames and databases.' },
  { format: 'npz', name: 'NPZ', purpose: 'One NumPy array a column; loads at once in Python.' },
];

/** Every format of the sample file with its size and what it is for, and the manifest. */
export function SampleDownloads({ fit }: { fit: Fit }) {
  const ended = !isRunning(fit.status);
  // Sizes are exact, so they are told of an ended fit only: one that runs is another file at every commit.
  const { data, error } = useSWR(
    ended ? [`/api/v1/fits/${fit.id}/manifest`, fit.progress.draws] : null,
    ([path]) => read<Manifest>(path),
    { revalidateOnFocus: false },
  );
  const sizeOf = (format: SampleFormat) => {
    const output = data?.outputs.find(({ name }) => name === `samples.${format}`);
    if (output) return fileSize(output.bytes);
    return ended && !error ? 'being measured' : noValue;
  };
  return (
    <>
      <Subheading>Samples</Subheading>
      <p>
        Every stored draw of all replicas, unrounded: {counted(fit.diagnostics.length, 'column')} beside its
        likelihood and prior. The formats hold the same rows.
        {ended ? '' : ' The fit is still running; a file holds what is committed when it is asked for.'}
      </p>
      <DataTable
        label="Formats of the sample file"
        columns={[
          { key: 'format', head: 'Format' },
          { key: 'size', head: 'Size', numeric: true },
          { key: 'purpose', head: 'For', phone: 'drop' },
        ]}
        rows={formats.map(({ format, name, purpose }) => ({
          key: format,
          cells: {
            format: (
              <a
                className="inline-flex min-h-target items-center text-action underline decoration-1 underline-offset-[3px]"
                href={`/api/v1/fits/${fit.id}/samples?format=${format}`}
                download
              >
                Samples ({name})
              </a>
            ),
            size: sizeOf(format),
            purpose,
          },
        }))}
      />
      <Buttons note="Checksums of every file, seeds, versions, and how to run it again.">
        <Button href={`/api/v1/fits/${fit.id}/manifest`} download={`fit-${fit.number}-manifest.json`}>
          Manifest (JSON)
        </Button>
      </Buttons>
    </>
  );
}
