'use client';

import dynamic from 'next/dynamic';
import type { CSSProperties, ReactNode } from 'react';
import { sectionNumber } from '@/components/notebook/sections';
import type { SectionFold } from '@/components/notebook/use-folds';
import { isOtherSettings } from '@/components/scan/scan-words';
import { Button, Buttons } from '@/components/ui/button';
import { Message } from '@/components/ui/message';
import { Record } from '@/components/ui/record';
import { Ruler } from '@/components/ui/run-figures';
import { Section, Subheading } from '@/components/ui/section';
import { StateWord } from '@/components/ui/state-word';
import { listed } from '@/components/words/counts';
import { shortName } from '@/components/words/people';
import { formatPercent } from '@/lib/figures/format';
import type { CheckListed, Notebook } from '@/lib/schemas';
import { CheckForm } from './check-form';
import { checksSentence, checksState, isPending, progressWords, roomOf } from './check-words';
import type { ChecksHandle } from './use-checks';

/** Loaded where there is more than one check to choose from. */
const CheckList = dynamic(() => import('./check-list').then((module) => module.CheckList));

/** Figures and tables are loaded where a check has ended; their room is kept meanwhile. */
const CheckResult = dynamic(() => import('./check-result').then((module) => module.CheckResult));

function Progress({
  check,
  handle: { busy, stop },
  mayStop,
}: {
  check: CheckListed;
  handle: ChecksHandle;
  mayStop: boolean;
}) {
  return (
    <>
      <p>{progressWords(check)} It goes on when this page is closed.</p>
      <Ruler done={check.progress} label={`${formatPercent(check.progress)} of the data sets ranked`} />
      {mayStop ? (
        <Buttons note="What is ranked stays; starting the same check goes on from there.">
          <Button
            busy={busy === 'stopping' ? 'Stopping' : undefined}
            reason={check.stopRequested ? 'It is stopping.' : undefined}
            onClick={() => void stop()}
          >
            Stop the check
          </Button>
        </Buttons>
      ) : null}
    </>
  );
}

/** How the check that is shown stands, where that isn't its result. */
function Standing({ check, notebook }: { check: CheckListed; notebook: Notebook }) {
  const { number, revision, status, done } = check;
  if (status === 'failed') {
    return (
      <Message level="warning" title={`Check ${number} could not be made`} quiet>
        <p>{check.message} What was ranked before stays; starting the same check goes on from there.</p>
      </Message>
    );
  }
  if (status === 'stopped') {
    return (
      <p>
        <StateWord kind="open">stopped</StateWord> Check {number} was stopped after {done} of{' '}
        {check.request.datasets} data sets; so few are not judged. Starting the same check goes on from there.
      </p>
    );
  }
  if (!isOtherSettings(check.request, notebook)) return null;
  return (
    <p>
      <StateWord kind="old">of revision {revision}</StateWord> Check {number} was made with a cut, template,
      priors or version that the notebook has not any more: it says nothing of the posterior as it is set now.
    </p>
  );
}

/** Keeps the room of a result while it and its figures are being read. */
function Room({ check, children }: { check: CheckListed; children: ReactNode }) {
  const { wide, narrow } = roomOf(check.request);
  const heights = { '--room': `${wide}px`, '--room-narrow': `${narrow}px` } as CSSProperties;
  return (
    <div
      aria-busy={children === null}
      style={heights}
      className="min-h-(--room) max-tablet:min-h-(--room-narrow)"
    >
      {children}
    </div>
  );
}

export interface ChecksSectionProps {
  notebook: Notebook;
  handle: ChecksHandle;
  /** Sections with changes that aren't saved. */
  unsaved: readonly number[];
  fold: SectionFold;
}

/** Whether the posterior can be trusted as a procedure: its calibration by simulation, started here. */
export function ChecksSection({ notebook, handle, unsaved, fold }: ChecksSectionProps) {
  const { checks, shown, found } = handle;
  const pending = shown && isPending(shown) ? shown : null;
  const may = (action: string) => notebook.may.includes(action);
  const reason = unsaved.length
    ? `Save or drop the changes of section ${listed(unsaved.map(String))} first.`
    : checks.some(isPending)
      ? 'A check is under way.'
      : undefined;
  return (
    <Section
      id="checks"
      number={sectionNumber('checks')}
      title="Checks"
      state={checksState(handle, notebook)}
      fold={{ ...fold, sentence: checksSentence(handle) }}
      margin={
        shown ? (
          <Record at={shown.createdAt}>
            Check {shown.number} started by <b>{shortName(shown.startedBy)}</b>, of revision {shown.revision}
          </Record>
        ) : null
      }
    >
      <Subheading>Calibration</Subheading>
      <p>
        Truths are drawn from the priors, data are simulated at each with the bins and the covariance of this
        measurement, and the posterior of each is sampled. Where posteriors mean what they say, the truth is
        as likely to have any rank among its posterior’s draws. No value of the measurement enters.
      </p>
      {may('check.start') ? <CheckForm handle={handle} reason={reason} /> : null}
      {!shown && !may('check.start') ? <p className="text-ink-2">None was made yet.</p> : null}
      <p role="status" className="sr-only">
        {pending ? 'Checking.' : shown?.status === 'done' ? `Check ${shown.number} has ended.` : ''}
      </p>
      {pending ? <Progress check={pending} handle={handle} mayStop={may('check.stop')} /> : null}
      {shown && !pending ? <Standing check={shown} notebook={notebook} /> : null}
      {shown?.status === 'done' ? (
        <Room check={shown}>{found ? <CheckResult check={found} /> : null}</Room>
      ) : null}
      {checks.length > 1 && shown ? (
        <CheckList checks={checks} shown={shown.id} onShow={handle.show} />
      ) : null}
    </Section>
  );
}
