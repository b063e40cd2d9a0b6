'use client';

import dynamic from 'next/dynamic';
import Link from 'next/link';
import { useState } from 'react';
import { RequestMessage } from '@/components/api/request-message';
import { detailAt } from '@/components/api/request';
import { MeasurementFigure } from '@/components/measurement/measurement-figure';
import { covarianceInWords } from '@/components/measurement/measurement-words';
import { SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { Opened } from '@/components/ui/opened';
import { Section } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import { DefinitionList } from '@/components/ui/definition-list';
import { capital, counted, plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { leftOutInWords } from '@/components/words/left-out';
import type { Measurement, Notebook } from '@/lib/schemas';
import { ConflictMessage, twoStand } from './conflict-message';
import { measurementSentence } from './fold-sentences';
import { cutInWords, furtherOf, type FurtherChoice } from './further-words';
import { keptRows, leftOut } from './kept-points';
import { LeftOutBins } from './left-out-bins';
import { likelihoodKinds, likelihoods, type LikelihoodKind } from './likelihood-words';
import { SaveRow } from './save-row';
import { conflictOf, type Draft } from './section-draft';
import { SectionRecord } from './section-record';
import { sectionState } from './section-states';
import type { SectionFold } from './use-folds';
import { useSectionSave, type NotebookState } from './use-notebook';
import { figureNumber, sectionNumber } from './sections';

/** Loaded where the measurement has a newer version than the notebook. */
const NewerVersion = dynamic(() => import('./newer-version').then((module) => module.NewerVersion));

/** The likelihood that is right where nobody chose one. */
function usualLikelihood({ mockCount }: Measurement, further: number, shared: boolean): LikelihoodKind {
  if (mockCount === null && !shared) return 'normal';
  return further === 0 || shared ? 'matched-t' : 'sellentin-heavens';
}

/** Asks for the group's other measurements. */
const FurtherMeasurements = dynamic(() =>
  import('./further-measurements').then((module) => module.FurtherMeasurements),
);

/** Simulates; loaded when it is opened. */
const CoverageTable = dynamic(() => import('./coverage-table').then((module) => module.CoverageTable));

export interface MeasurementSettings {
  cuts: Notebook['cuts'];
  likelihood: Notebook['likelihood'];
  alsoMeasurements: FurtherChoice[];
  sharedMocks: boolean;
}

export interface MeasurementSectionProps {
  state: NotebookState;
  measurement: Measurement;
  /** Further measurements of the draft, as far as they are there. */
  further: readonly Measurement[];
  draft: Draft<MeasurementSettings>;
  fold: SectionFold;
}

/** A cut's two ends without those that are left open. */
function cutsOf(
  before: Notebook['cuts'],
  { kappaMin, kappaMax }: { kappaMin: number | null | undefined; kappaMax: number | null | undefined },
): Notebook['cuts'] {
  return {
    ...(before.excluded ? { excluded: before.excluded } : {}),
    ...(kappaMin === null || kappaMin === undefined ? {} : { kappaMin }),
    ...(kappaMax === null || kappaMax === undefined ? {} : { kappaMax }),
  };
}

function Choice({
  measurement,
  further,
  draft,
  error,
}: {
  measurement: Measurement;
  further: readonly Measurement[];
  draft: Draft<MeasurementSettings>;
  error: ReturnType<typeof useSectionSave>['error'];
}) {
  const { cuts, likelihood } = draft.value;
  const setCuts = (next: Notebook['cuts']) => draft.change({ ...draft.value, cuts: next });
  const reach = `The measurement covers ${plain(measurement.kappaMin, 3)} to ${plain(measurement.kappaMax, 3)}.`;
  return (
    <div className="grid max-w-figure grid-cols-[144px_144px_minmax(0,1fr)] gap-4 max-tablet:grid-cols-1 max-tablet:gap-2">
      <NumberField
        label={
          <>
            Lowest <Sym base="κ" />
          </>
        }
        name="kappaMin"
        value={cuts.kappaMin ?? null}
        onValue={(value) => setCuts(cutsOf(cuts, { kappaMin: value, kappaMax: cuts.kappaMax }))}
        error={detailAt(error, 'cuts.kappaMin')}
        help="Empty: no cut."
      />
      <NumberField
        label={
          <>
            Highest <Sym base="κ" />
          </>
        }
        name="kappaMax"
        value={cuts.kappaMax ?? null}
        onValue={(value) => setCuts(cutsOf(cuts, { kappaMin: cuts.kappaMin, kappaMax: value }))}
        error={detailAt(error, 'cuts.kappaMax') ?? detailAt(error, 'cuts')}
        help={reach}
      />
      <SelectField
        label="Likelihood"
        name="likelihood"
        value={likelihood.kind}
        options={likelihoodKinds.map((kind) => ({
          value: kind,
          label: likelihoods[kind].label,
          disabled:
            likelihoods[kind].needsMocks &&
            [measurement, ...further].every(({ mockCount }) => mockCount === null),
        }))}
        onChange={(event) =>
          draft.change({ ...draft.value, likelihood: { kind: event.target.value as LikelihoodKind } })
        }
        error={detailAt(error, 'likelihood')}
        help={likelihoods[likelihood.kind].meaning}
      />
    </div>
  );
}

function settingsInWords({ cuts, likelihood, alsoMeasurements, sharedMocks }: MeasurementSettings) {
  const end = (value: number | undefined) => (value === undefined ? 'no cut' : plain(value));
  return {
    kappaMin: end(cuts.kappaMin),
    kappaMax: end(cuts.kappaMax),
    excluded: leftOutInWords(cuts.excluded ?? []) || 'no bin left out',
    further: alsoMeasurements.length
      ? `${counted(alsoMeasurements.length, 'other')}: ${alsoMeasurements.map((each) => cutInWords(each.cuts)).join('; ')}${sharedMocks ? '; the same mock skies' : ''}`
      : 'none',
    likelihood: likelihoods[likelihood.kind].label,
  };
}

/** Which data, cut how, with which likelihood. */
export function MeasurementSection({ state, measurement, further, draft, fold }: MeasurementSectionProps) {
  const { notebook } = state;
  const section = useSectionSave(state);
  const { cuts } = draft.value;
  const rows = keptRows(measurement.points, cuts);
  const hollow = leftOut(measurement.points, cuts);
  const [picked, setPicked] = useState<number | null>(null);
  const all = measurement.rows;
  const { alsoMeasurements: chosen, sharedMocks } = draft.value;
  const mocks = measurement.mockCount;
  const sampled = Object.values(notebook.priors).filter(({ kind }) => kind !== 'fixed').length;
  const editable = notebook.may.includes('notebook.edit');
  // Once a newer version was spoken of, what came of taking it up is said in the same place.
  const [older, setOlder] = useState(false);
  if (!older && notebook.measurement.newest > notebook.measurement.version) setOlder(true);

  async function save(base: number) {
    if (await section.save(draft.value, base)) draft.reset();
  }

  const conflict = conflictOf(draft, notebook, section);
  const together = (
    <FurtherMeasurements
      notebook={notebook}
      chosen={chosen}
      measurements={further}
      sharedMocks={sharedMocks}
      editable={editable}
      error={section.error}
      onChosen={(next, shared) => {
        const alike = next.length === chosen.length && shared === sharedMocks;
        draft.change({
          ...draft.value,
          alsoMeasurements: next,
          sharedMocks: shared,
          // Another number of measurements has another likelihood that is right where nobody chose one.
          ...(alike ? {} : { likelihood: { kind: usualLikelihood(measurement, next.length, shared) } }),
        });
      }}
    />
  );
  return (
    <Section
      id="measurement"
      number={sectionNumber('measurement')}
      title="Measurement"
      state={sectionState(draft.changed, notebook)}
      fold={{ ...fold, sentence: measurementSentence(measurement, draft.value) }}
      margin={<SectionRecord notebook={notebook} section="measurement" />}
    >
      <p>
        <Link href={`/measurements/${measurement.id}?version=${notebook.measurement.version}`}>
          {notebook.measurement.name}, version {notebook.measurement.version}
        </Link>
        :{' '}
        {rows.length === all
          ? `all ${counted(all, 'bin')} kept`
          : `${rows.length} of ${counted(all, 'bin')} kept`}
        , {covarianceInWords(measurement)}.
      </p>
      {older ? <NewerVersion state={state} /> : null}
      <MeasurementFigure
        measurement={measurement}
        kept={rows}
        leftOut={hollow}
        onPick={editable ? setPicked : undefined}
        number={figureNumber('measurement')}
        caption={
          <>
            {capital(counted(rows.length, 'bin'))} of {notebook.measurement.name} against <Sym base="κ" />
            {cuts.kappaMin === undefined && cuts.kappaMax === undefined ? (
              ''
            ) : (
              <>
                {' '}
                inside the cut <KappaRange lo={cuts.kappaMin} hi={cuts.kappaMax} />
              </>
            )}
            {hollow.length ? `, ${leftOutInWords(hollow)}` : ''}; {covarianceInWords(measurement)}.
          </>
        }
      />
      {editable ? (
        <>
          <Choice measurement={measurement} further={further} draft={draft} error={section.error} />
          <LeftOutBins
            points={measurement.points}
            cuts={cuts}
            onExcluded={(excluded) => {
              const { kappaMin, kappaMax } = cuts;
              const next = excluded.length ? { excluded } : {};
              draft.change({ ...draft.value, cuts: cutsOf(next, { kappaMin, kappaMax }) });
            }}
            picked={picked}
            onPicked={setPicked}
            error={section.error?.details.find(({ path }) => path?.startsWith('cuts.excluded'))?.message}
          />
          {together}
          <SaveRow
            draft={draft}
            revision={notebook.revision}
            saving={section.saving}
            fault={conflict ? twoStand : rows.length ? undefined : 'The cut keeps no bin; widen it.'}
            onSave={() => void save(draft.base)}
          />
        </>
      ) : (
        <>
          <DefinitionList
            entries={[
              { term: 'Cut', text: <KappaRange lo={cuts.kappaMin} hi={cuts.kappaMax} /> },
              ...(cuts.excluded ? [{ term: 'Left out', text: capital(leftOutInWords(cuts.excluded)) }] : []),
              { term: 'Likelihood', text: likelihoods[draft.value.likelihood.kind].meaning },
            ]}
          />
          {together}
        </>
      )}
      {chosen.length === 0 && mocks !== null && sampled > 0 && rows.length > sampled ? (
        <Opened words="What intervals are worth with these mocks">
          <CoverageTable
            bins={rows.length}
            mocks={mocks}
            parameters={sampled}
            chosen={draft.value.likelihood.kind}
          />
        </Opened>
      ) : null}
      {conflict ? (
        <ConflictMessage
          conflict={conflict}
          section={section}
          sides={(['kappaMin', 'kappaMax', 'excluded', 'further', 'likelihood'] as const).map((key) => ({
            key,
            what: {
              kappaMin: 'Lowest κ',
              kappaMax: 'Highest κ',
              excluded: 'Bins left out',
              further: 'Further measurements',
              likelihood: 'Likelihood',
            }[key],
            theirs: settingsInWords({
              ...conflict.theirs,
              alsoMeasurements: furtherOf(conflict.theirs),
            })[key],
            mine: settingsInWords(draft.value)[key],
          }))}
          onMine={(base) => void save(base)}
          onTheirs={() => {
            section.settle();
            draft.reset();
            void state.put(conflict.theirs);
          }}
        />
      ) : null}
      <RequestMessage
        error={section.error}
        title={`Section ${sectionNumber('measurement')} was not saved`}
        shown={['cuts', 'likelihood', 'alsoMeasurements', 'sharedMocks']}
      />
    </Section>
  );
}
