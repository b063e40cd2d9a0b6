'use client';

import Link from 'next/link';
import { useState } from 'react';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import { Button, Buttons } from '@/components/ui/button';
import { Contents, type ContentsEntry } from '@/components/ui/contents';
import { DefinitionList } from '@/components/ui/definition-list';
import { Message } from '@/components/ui/message';
import { Num } from '@/components/ui/num';
import { Record } from '@/components/ui/record';
import { PageHead, Section } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { checksState } from '@/components/group/measurement-index';
import { capital, counted, fileSize, listed, plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { shortName } from '@/components/words/people';
import { summarise } from '@/lib/measurements/measurement';
import type { Measurement, Spectrum } from '@/lib/schemas';
import { ChecksTable } from './checks-table';
import { CorrelationBody } from './correlation-section';
import { DeleteBody, DescribeForm } from './manage-measurement';
import { MeasurementFigure } from './measurement-figure';
import { covarianceInWords } from './measurement-words';
import { SpectrumFormula } from './spectrum-fields';
import { RestingBody, VersionsBody } from './versions-section';
import { partWords } from './part-words';
import { TheoryBody } from './theory-body';

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

/** "the bispectrum B in (Mpc/h)^6 with k in h/Mpc, by Aₛ = 2.1 × 10⁻⁹, nₛ = 0.965, k∗ = 0.05 1/Mpc and h = 0.7" */
function OfBispectrum({ spectrum }: { spectrum: Spectrum }) {
  const { amplitude, tilt, pivot, pivotUnit, wavenumberUnit, bispectrumUnit, h } = spectrum;
  const parts = [
    `Aₛ = ${plain(amplitude)}`,
    `nₛ = ${plain(tilt)}`,
    ...(pivot === null ? [] : [`k∗ = ${plain(pivot)} ${pivotUnit}`]),
    ...(h === null ? [] : [`h = ${plain(h)}`]),
  ];
  return (
    <>
      The bispectrum <Sym base="B" /> in {bispectrumUnit} with <Sym base="k" /> in {wavenumberUnit}, by{' '}
      {listed(parts)}
    </>
  );
}

function Facts({ measurement }: { measurement: Measurement }) {
  const { rows, kappaMin, kappaMax, hasBinEdges, simulated, version, spectrum } = measurement;
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
        ...(spectrum ? [{ term: 'From', text: <OfBispectrum spectrum={spectrum} /> }] : []),
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

function entriesOf(measurement: Measurement): ContentsEntry[] {
  const { blind, checks, covarianceSource, versions, resting, newest, files, may } = measurement;
  const older = resting.filter(({ version }) => version < newest).length;
  return [
    {
      href: '#points',
      number: 1,
      title: 'Points',
      state: blind ? { kind: 'blind', word: 'blind' } : undefined,
    },
    {
      href: '#correlation',
      number: 2,
      title: 'Correlation',
      note: covarianceSource === 'errors' ? 'none given' : undefined,
    },
    { href: '#checks', number: 3, title: 'Checks', state: checksState(checks) },
    { href: '#versions', number: 4, title: 'Versions', note: String(versions.length) },
    {
      href: '#notebooks',
      number: 5,
      title: 'Notebooks on it',
      ...(older
        ? { state: { kind: 'old', word: `${older} on an older version` } as const }
        : { note: resting.length ? String(resting.length) : 'none yet' }),
    },
    { href: '#files', number: 6, title: 'Files', note: `${files.length} stored` },
    ...(may.includes('measurement.delete') ? [{ href: '#delete', number: 7, title: 'Delete' }] : []),
  ];
}

/** A stored measurement in one version: points, correlation, checks, versions, what rests on it, files. */
export function MeasurementSheet({ initial, groupName }: { initial: Measurement; groupName: string }) {
  const { data: measurement = initial, mutate } = useSWR(
    `/api/v1/measurements/${initial.id}?version=${initial.version}`,
    read<Measurement>,
    { fallbackData: initial, revalidateOnMount: false },
  );
  const [describing, setDescribing] = useState(false);
  const { id, groupId, name, version, newest, description, blind, checks, rows, may } = measurement;
  return (
    <Sheet contents={<Contents label="Of this measurement" entries={entriesOf(measurement)} />}>
      <PageHead
        title={name}
        kicker={`${groupName}, measurement, version ${version}${version < newest ? ` of ${newest}` : ''}${blind ? ', blind' : ''}${measurement.simulated ? ', simulated' : ''}`}
        abstract={describing ? undefined : description || undefined}
        margin={
          <Record at={measurement.uploadedAt}>
            Version {version} stored by <b>{shortName(measurement.uploadedBy)}</b>
          </Record>
        }
      >
        {version < newest ? (
          <Message level="warning" quiet title={`Version ${newest} is the newest`}>
            <p>
              This is version {version}, as it was stored.{' '}
              <Link href={`/measurements/${id}`}>Show version {newest}</Link>
            </p>
          </Message>
        ) : null}
        {describing ? (
          <DescribeForm
            measurement={measurement}
            onCancel={() => setDescribing(false)}
            onSaved={() => {
              setDescribing(false);
              void mutate();
            }}
          />
        ) : (
          <Buttons>
            {may.includes('notebook.create') ? (
              <Button kind="primary" href={`/groups/${groupId}/notebooks/new?measurement=${id}`}>
                Open a notebook on it
              </Button>
            ) : null}
            {may.includes('measurement.upload') ? (
              <Button href={`/measurements/${id}/versions/new`}>Add a newer version</Button>
            ) : null}
            {may.includes('measurement.edit') ? (
              <Button onClick={() => setDescribing(true)}>Rename or describe</Button>
            ) : null}
          </Buttons>
        )}
        <div className="h-4" />
      </PageHead>
      <Section id="points" number={1} title="Points">
        <Facts measurement={measurement} />
        {measurement.spectrum ? <SpectrumFormula /> : null}
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
        {measurement.theory ? <TheoryBody measurement={measurement} theory={measurement.theory} /> : null}
      </Section>
      <Section id="correlation" number={2} title="Correlation">
        <CorrelationBody measurement={measurement} number={2} />
      </Section>
      <Section id="checks" number={3} title="Checks" state={checksState(checks)}>
        <ChecksTable checks={checks} />
      </Section>
      <Section id="versions" number={4} title="Versions">
        <VersionsBody measurement={measurement} />
      </Section>
      <Section id="notebooks" number={5} title="Notebooks on it">
        <RestingBody measurement={measurement} onChange={() => void mutate()} />
      </Section>
      <Section id="files" number={6} title="Files">
        <Files measurement={measurement} />
      </Section>
      {may.includes('measurement.delete') ? (
        <Section id="delete" number={7} title="Delete">
          <DeleteBody measurement={measurement} />
        </Section>
      ) : null}
    </Sheet>
  );
}
