'use client';

import { Message } from '@/components/ui/message';
import { BrokenTone } from '@/components/ui/motif';
import { Stamp } from '@/components/ui/num';
import { Record } from '@/components/ui/record';
import { Section, Subheading } from '@/components/ui/section';
import { WordButton } from '@/components/ui/word-button';
import { clockTime } from '@/components/words/dates';
import { counted, inWords, listed } from '@/components/words/counts';
import { shortName } from '@/components/words/people';
import { shortHash } from '@/components/measurement/measurement-words';
import { chainsSentence } from '@/components/notebook/fold-sentences';
import { chainsState, isOutdated } from '@/components/notebook/section-states';
import type { SectionFold } from '@/components/notebook/use-folds';
import { formatCount } from '@/lib/figures/format';
import type { Fit, Notebook } from '@/lib/schemas';
import type { FigureDraws } from './draws';
import { ConvergenceTable } from './convergence-table';
import { FitControls } from './fit-controls';
import { FitList } from './fit-list';
import { fitPredicate, isRunning } from './fit-words';
import { announcement, doneShare, LiveFigures } from './live-figures';
import { MovesTable } from './moves-table';
import type { Quantity } from './quantities';
import { StartForm, type FitDefaults } from './start-form';
import { Traces } from './traces';
import type { Connection } from './use-page-events';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';

export interface ChainsSectionProps {
  notebook: Notebook;
  fit: Fit | null;
  draws: FigureDraws | null;
  connection: Connection;
  quantities: ReadonlyMap<string, Quantity>;
  defaults: FitDefaults;
  /** Sections whose changes aren't saved. */
  unsaved: readonly number[];
  fold: SectionFold;
  onFit: (fit: Fit) => void;
  onShow: (id: string) => void;
  onStarted: (id: string) => Promise<unknown>;
}

const awayWords = {
  server: 'The server can’t be reached; the fit goes on without this page.',
  database: 'The database is away; the fit goes on when it is back.',
} as const;

/** Says what is away, once; the seconds to the next try are read by whoever looks, and not called out each second. */
function Lost({ connection }: { connection: Connection }) {
  const away = connection.kind === 'away' ? connection : null;
  return (
    <>
      <p role="status" className="sr-only">
        {away ? awayWords[away.what] : ''}
      </p>
      {away ? (
        <Message level="warning" quiet title={awayWords[away.what]}>
          <p>
            Figures show what was last received, at {clockTime(away.at)}. This page follows by itself
            {away.secondsLeft === null ? (
              '.'
            ) : (
              <>
                , and tries again {away.secondsLeft > 0 ? `in ${counted(away.secondsLeft, 'second')}` : 'now'}
                . <WordButton onClick={away.retry}>Try now</WordButton>
              </>
            )}
          </p>
        </Message>
      ) : null}
    </>
  );
}

function Failed({ fit }: { fit: Fit }) {
  const { draws, warmup } = fit.progress;
  const kept = draws * fit.replicas;
  return (
    <>
      <BrokenTone at={doneShare(fit)} />
      <Message
        quiet
        level="error"
        title={`Fit ${fit.number} failed ${draws > 0 ? `after draw ${formatCount(draws)}` : `in warm-up, after draw ${formatCount(warmup)}`} of each replica`}
      >
        {fit.message ? <p>{fit.message}</p> : null}
        <p>
          {kept > 0
            ? `Nothing is lost: ${formatCount(kept)} draws are kept.`
            : 'No draw was kept. The notebook is as it was.'}
        </p>
      </Message>
    </>
  );
}

function Sentence({ fit, notebook }: { fit: Fit; notebook: Notebook }) {
  const { number, replicas, revision, progress, status } = fit;
  const old = isOutdated(revision, notebook)
    ? ` It froze revision ${revision}; the notebook has changed since.`
    : '';
  const what = `Fit ${number}, ${inWords(replicas)} replicas,`;
  if (!isRunning(status)) return <p>{`${what} ${fitPredicate(status)}.${old}`}</p>;
  return (
    <p>
      {what} {fitPredicate(status)}. It stops by itself when every quantity meets the gate or when{' '}
      {formatCount(progress.maxDraws)} draws a replica are made.
      {old}
    </p>
  );
}

function Margin({ fit }: { fit: Fit }) {
  return (
    <>
      <Record at={fit.createdAt}>
        Started by <b>{shortName(fit.startedBy)}</b>
      </Record>
      <Record>
        Seed{' '}
        <Stamp>
          {fit.snapshot.seed.length > 12 ? `${fit.snapshot.seed.slice(0, 12)}…` : fit.snapshot.seed}
        </Stamp>
        <br />
        Snapshot <Stamp>{shortHash(fit.snapshot.sha256)}</Stamp>
      </Record>
      {fit.endedAt ? <Record at={fit.endedAt}>Ended</Record> : null}
    </>
  );
}

const frozen = listed(
  (['measurement', 'template', 'priors'] as const).map((id) => String(sectionNumber(id))),
);

/** Settings of the sampler, and a fit as it goes. */
export function ChainsSection(props: ChainsSectionProps) {
  const { notebook, fit, draws, connection, quantities, unsaved, fold } = props;
  const mayStart = notebook.may.includes('fit.start');
  const running = notebook.fits.some(({ status }) => isRunning(status));
  const number = Math.max(0, ...notebook.fits.map((each) => each.number)) + 1;
  const reason = unsaved.length
    ? `Save or drop the changes of section ${listed(unsaved.map(String))} first.`
    : undefined;
  return (
    <Section
      id="chains"
      number={sectionNumber('chains')}
      title="Chains"
      state={chainsState(fit, notebook)}
      fold={{ ...fold, sentence: chainsSentence(fit) }}
      margin={fit ? <Margin fit={fit} /> : null}
    >
      {fit ? (
        <>
          <Sentence fit={fit} notebook={notebook} />
          {fit.status === 'failed' ? <Failed fit={fit} /> : null}
          {fit.message && fit.status !== 'failed' ? <p className="text-ink-2">{fit.message}</p> : null}
          <LiveFigures fit={fit} />
          <p aria-live="polite" className="sr-only">
            {announcement(fit)}
          </p>
          <p role="status" className="sr-only">
            {isRunning(fit.status) ? '' : `Fit ${fit.number} ${fitPredicate(fit.status)}.`}
          </p>
          <FitControls key={fit.id} fit={fit} onFit={props.onFit} />
          <Lost connection={connection} />
          {fit.diagnostics.length ? <ConvergenceTable fit={fit} quantities={quantities} /> : null}
          {fit.acceptance.length ? (
            <>
              <Subheading>Moves</Subheading>
              <MovesTable fit={fit} quantities={quantities} />
            </>
          ) : null}
          {draws ? (
            <Traces fit={fit} draws={draws} quantities={quantities} number={figureNumber('traces')} />
          ) : null}
        </>
      ) : (
        <p>
          No fit yet. A fit freezes sections {frozen} and samples their posterior; it goes on when this page
          is closed.
        </p>
      )}
      {fit && notebook.fits.length > 1 ? (
        <>
          <Subheading>Fits</Subheading>
          <FitList
            fits={notebook.fits}
            notebook={notebook}
            shownId={fit.id}
            shownStatus={fit.status}
            onShow={props.onShow}
          />
        </>
      ) : null}
      {mayStart ? (
        <div className="no-print">
          {fit ? <Subheading>New fit</Subheading> : null}
          <StartForm
            notebookId={notebook.id}
            number={number}
            revision={notebook.revision}
            defaults={props.defaults}
            primary={!running}
            reason={reason}
            onStarted={props.onStarted}
          />
        </div>
      ) : null}
    </Section>
  );
}
