'use client';

import dynamic from 'next/dynamic';
import { useMemo } from 'react';
import type { KeptPoints } from '@/components/notebook/kept-points';
import { sectionNumber } from '@/components/notebook/sections';
import type { SectionFold } from '@/components/notebook/use-folds';
import { Message } from '@/components/ui/message';
import { Record } from '@/components/ui/record';
import { Ruler } from '@/components/ui/run-figures';
import { Section, Subheading } from '@/components/ui/section';
import { StateWord } from '@/components/ui/state-word';
import { listed } from '@/components/words/counts';
import { shortName } from '@/components/words/people';
import { formatCount, formatPercent } from '@/lib/figures/format';
import type { Notebook, Scan } from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';
import { rangeOf } from './coverage';
import { CoveragePart } from './coverage-part';
import { ScanForm } from './scan-form';
import { isOtherSettings, isPending, scanSentence, scanState } from './scan-words';
import type { ScanHandle } from './use-scans';

/** Loaded where there is something to list. */
const TrialLog = dynamic(() => import('./trial-log').then((module) => module.TrialLog));

/** Figures of a result are loaded where there is one; its room is kept meanwhile, as while it is being read. */
const ScanResultPart = dynamic(() => import('./scan-result').then((module) => module.ScanResultPart), {
  loading: () => <div aria-busy="true" className="min-h-[840px]" />,
});

function Progress({ scan, starting }: { scan: Scan | null; starting: boolean }) {
  const pending = scan && isPending(scan) ? scan : null;
  const running = pending !== null || starting;
  const part = pending?.progress ?? 0;
  return (
    <>
      <p role="status" className="sr-only">
        {running ? 'Scanning.' : scan?.status === 'done' ? `Scan ${scan.number} has ended.` : ''}
      </p>
      {running ? (
        <>
          <p>
            {pending?.status === 'running'
              ? `Scan ${pending.number} goes through the frequencies and ${formatCount(pending.request.nulls)} nulls: ${formatPercent(part)} done.`
              : 'The scan waits for a worker.'}{' '}
            It goes on when this page is closed.
          </p>
          <Ruler done={part} label={`${formatPercent(part)} of the scan done`} />
        </>
      ) : null}
    </>
  );
}

function ScanPart({
  notebook,
  handle,
  range,
  unsaved,
}: {
  notebook: Notebook;
  handle: ScanHandle;
  range: ReturnType<typeof rangeOf>;
  unsaved: readonly number[];
}) {
  const { trials, scan, shown, starting } = handle;
  const fields = fieldCount(notebook.template.options.fields);
  const looks = trials.trials.filter((trial) => trial.scan === shown);
  const mayScan = notebook.may.includes('scan.start');
  const reason = unsaved.length
    ? `Save or drop the changes of section ${listed(unsaved.map(String))} first.`
    : undefined;
  const pending = scan !== null && isPending(scan);
  return (
    <>
      <Subheading>Scan</Subheading>
      {range === null ? (
        <p>
          The template has no frequency to scan for: choose one of heavy fields in section{' '}
          {sectionNumber('template')}.
        </p>
      ) : (
        <>
          <p>
            A scan fits a field at each frequency and shows where it helps; simulated measurements without a
            signal say how often it would help as much by chance.
          </p>
          {mayScan ? (
            <ScanForm handle={handle} range={range} planned={fields > 1 ? 'two' : 'one'} reason={reason} />
          ) : trials.trials.length ? null : (
            <p className="text-ink-2">None was made yet.</p>
          )}
        </>
      )}
      <Progress scan={scan} starting={starting} />
      {scan?.status === 'failed' ? (
        <Message level="warning" title={`Scan ${scan.number} could not be made`} quiet>
          <p>{scan.message} The notebook is as it was; the attempt stays in the log.</p>
        </Message>
      ) : null}
      {scan?.best && isOtherSettings(scan.request, notebook) ? (
        <p>
          <StateWord kind="old">of other settings</StateWord> Scan {scan.number} was made with a cut,
          template, priors or version that the notebook has not any more.
        </p>
      ) : null}
      {shown !== null && !pending && !starting && scan?.status !== 'failed' ? (
        <ScanResultPart scan={scan} two={looks.some(({ kind }) => kind === 'two')} />
      ) : null}
      {trials.trials.length ? <TrialLog trials={trials} shown={shown} onShow={handle.show} /> : null}
    </>
  );
}

/** What the bins can see of frequencies, and the scan for them with what it means. */
export function ScanSection({
  notebook,
  points,
  handle,
  unsaved,
  fold,
}: {
  notebook: Notebook;
  points: KeptPoints;
  handle: ScanHandle;
  /** Sections whose changes aren't saved. */
  unsaved: readonly number[];
  fold: SectionFold;
}) {
  const { trials, scan } = handle;
  const range = useMemo(() => rangeOf(notebook.template, notebook.priors), [notebook]);
  return (
    <Section
      id="scan"
      number={sectionNumber('scan')}
      title="Coverage and scan"
      state={scanState(trials, scan, notebook)}
      fold={{ ...fold, sentence: scanSentence(scan, notebook) }}
      margin={
        scan && !notebook.blind ? (
          <Record at={scan.createdAt}>
            Scan {scan.number} started by <b>{shortName(scan.startedBy)}</b>
          </Record>
        ) : null
      }
    >
      <CoveragePart points={points} template={notebook.template} range={range} />
      {notebook.blind ? (
        <>
          <Subheading>Scan</Subheading>
          <p>
            <StateWord kind="blind">blind</StateWord> The measurement is blind, so nothing is looked for in it
            yet, and earlier scans are withheld. Coverage has no value of it and stays in view.
          </p>
        </>
      ) : (
        <ScanPart notebook={notebook} handle={handle} range={range} unsaved={unsaved} />
      )}
    </Section>
  );
}
