'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import { Button, Buttons } from '@/components/ui/button';
import { Contents } from '@/components/ui/contents';
import { DefinitionList } from '@/components/ui/definition-list';
import { Num } from '@/components/ui/num';
import { Record } from '@/components/ui/record';
import { PageHead, Section } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { checksState } from '@/components/group/measurement-index';
import { capital, counted, fileSize, plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { shortName } from '@/components/words/people';
import { summarise } from '@/lib/measurements/measurement';
import type { Measurement } from '@/lib/schemas';
import { ChecksTable } from './checks-table';
import { MeasurementFigure } from './measurement-figure';
import { covarianceInWords } from './measurement-words';

const partWords = { file: 'points', covariance: 'covariance', mocks: 'mocks' } as const;

/** Resolution and highest frequency of these bins. */
function coverage({ points }: Measurement) {
  const floats = (values: number[] | null) => values && Float64Array.from(values);
  const kappa = Float64Array.from(points.kappa);
  return summarise({
    kappa,
    kappaLo: floats(points.kappaLo),
    kappaHi: floats(points.kappaHi),
    S: kappa,
    sigma: null,
    order: Int32Array.from(kappa.keys()),
  });
}

function Facts({ measurement }: { measurement: Measurement }) {
  const { rows, kappaMin, kappaMax, hasBinEdges, simulated, version } = measurement;
  const { resolution, nyquist } = coverage(measurement);
  return (
    <DefinitionList
      entries={[
        { term: 'Version', text: String(version) },
        {
          term: 'Bins',
          text: (
            <>
              <Num>{rows}</Num>, <KappaRange lo={kappaMin} hi={kappaMax} />;{' '}
              {hasBinEdges ? 'edges given' : 'no edges'}
            </>
          ),
        },
        { term: 'Errors', text: capital(covarianceInWords(measurement)) },
        {
          term: 'Can see',
          text: (
            <>
              frequencies up to <Sym base="μ" /> = <Num>{plain(nyquist, 3)}</Num>, two of them apart by{' '}
              <Num>{plain(resolution, 2)}</Num> or more
            </>
          ),
        },
        { term: 'Origin', text: simulated ? 'Simulated' : 'Measured' },
      ]}
    />
  );
}

function Files({ measurement }: { measurement: Measurement }) {
  return (
    <DataTable
      number={1}
      caption="The files as they were stored."
      label="Files"
      columns={[
        { key: 'name', head: 'File' },
        { key: 'part', head: 'Holds' },
        { key: 'bytes', head: 'size', numeric: true },
        { key: 'sha', head: 'SHA-256', numeric: true, phone: 'drop' },
      ]}
      rows={measurement.files.map(({ part, fileName, bytes, sha256 }) => ({
        key: part,
        cells: {
          name: <span className="font-numbers text-number wrap-anywhere">{fileName}</span>,
          part: partWords[part],
          bytes: fileSize(bytes),
          sha: (
            <abbr
              className="no-underline"
              title={sha256}
            >{`${sha256.slice(0, 8)} … ${sha256.slice(-8)}`}</abbr>
          ),
        },
      }))}
    />
  );
}

/** A stored measurement: its points, what it covers, what the checks found, its files. */
export function MeasurementSheet({ initial, groupName }: { initial: Measurement; groupName: string }) {
  const { data: measurement = initial } = useSWR(`/api/v1/measurements/${initial.id}`, read<Measurement>, {
    fallbackData: initial,
    revalidateOnMount: false,
  });
  const { id, groupId, name, version, description, blind, checks, rows } = measurement;
  return (
    <Sheet
      contents={
        <Contents
          label="Of this measurement"
          entries={[
            {
              href: '#points',
              number: 1,
              title: 'Points',
              state: blind ? { kind: 'blind', word: 'blind' } : undefined,
            },
            { href: '#checks', number: 2, title: 'Checks', state: checksState(checks) },
            { href: '#files', number: 3, title: 'Files', note: `${measurement.files.length} stored` },
          ]}
        />
      }
    >
      <PageHead
        title={name}
        kicker={`${groupName}, measurement, version ${version}${blind ? ', blind' : ''}${measurement.simulated ? ', simulated' : ''}`}
        abstract={description || undefined}
        margin={
          <Record at={measurement.uploadedAt}>
            Stored by <b>{shortName(measurement.uploadedBy)}</b>
          </Record>
        }
      >
        {measurement.may.includes('notebook.create') ? (
          <Buttons>
            <Button kind="primary" href={`/groups/${groupId}/notebooks/new?measurement=${id}`}>
              Open a notebook on it
            </Button>
          </Buttons>
        ) : null}
        <div className="h-4" />
      </PageHead>
      <Section id="points" number={1} title="Points">
        <Facts measurement={measurement} />
        <MeasurementFigure
          measurement={measurement}
          number={1}
          caption={
            <>
              {capital(counted(rows, 'bin'))} of {name}, version {version}, against <Sym base="κ" />;{' '}
              {covarianceInWords(measurement)}.
            </>
          }
        />
      </Section>
      <Section id="checks" number={2} title="Checks" state={checksState(checks)}>
        <ChecksTable checks={checks} />
      </Section>
      <Section id="files" number={3} title="Files">
        <Files measurement={measurement} />
      </Section>
    </Sheet>
  );
}
