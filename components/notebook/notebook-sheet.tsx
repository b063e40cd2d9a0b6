'use client';

import dynamic from 'next/dynamic';
import { useEffect, useEffectEvent, useMemo, useState } from 'react';
import { ChecksSection } from '@/components/checks/checks-section';
import { checksState } from '@/components/checks/check-words';
import { useChecks } from '@/components/checks/use-checks';
import { ComparisonSection, comparisonState } from '@/components/comparison/comparison-section';
import { useComparison } from '@/components/comparison/use-comparison';
import { ChainsSection } from '@/components/fit/chains-section';
import { bestIndex, drawValues, type FigureDraws } from '@/components/fit/draws';
import { isRunning } from '@/components/fit/fit-words';
import { fixedValues } from '@/components/fit/posterior-figures';
import { PosteriorSection } from '@/components/fit/posterior-section';
import { quantitiesOf } from '@/components/fit/quantities';
import type { FitDefaults } from '@/components/fit/start-form';
import { useDraws, useFit } from '@/components/fit/use-fit';
import { usePageEvents } from '@/components/fit/use-page-events';
import { useVersion } from '@/components/measurement/use-version';
import { Contents } from '@/components/ui/contents';
import { BeatEnd } from '@/components/ui/motif';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { bestOfScan } from '@/components/scan/best-point';
import { ScanSection } from '@/components/scan/scan-section';
import { scanState } from '@/components/scan/scan-words';
import { useScans } from '@/components/scan/use-scans';
import { StatementSection } from '@/components/statement/statement-section';
import { statementState } from '@/components/statement/statement-state';
import { useStatement } from '@/components/statement/use-statement';
import type { CheckListed, Fit, Notebook, Statement, Trials } from '@/lib/schemas';
import { Abstract } from './abstract';
import { furtherOf } from './further-words';
import { furtherOfFit, labelsOfFit } from './fit-measurements';
import { keepTogether, measurementLabels } from './kept-points';
import type { DrawnFormula } from './live-formula';
import { MeasurementSection, type MeasurementSettings } from './measurement-section';
import { NotebookHead } from './notebook-head';
import { unpackMeasurement, type PackedMeasurement } from './packed-measurement';
import { PriorsSection, type Priors } from './priors-section';
import { useDraft } from './section-draft';
import { chainsState, contentsEntries, posteriorState, sectionState } from './section-states';
import { sectionNumber, type SectionId } from './sections';
import { TemplateSection, tryPrediction, type NamedPoint } from './template-section';
import { FoldScript } from './fold-script';
import { foldKey, useFolds, type SectionFold } from './use-folds';
import { useFurther } from './use-further';
import { useNotebook } from './use-notebook';

/** Stands where the measurement has had more than one version, and is loaded there. */
const Shifts = dynamic(() => import('./shifts').then((module) => module.Shifts));

export interface NotebookSheetProps {
  notebook: Notebook;
  measurement: PackedMeasurement;
  /** Further measurements of the notebook as it stands. */
  further: readonly PackedMeasurement[];
  /** The fit that is shown first; null without any. */
  fit: Fit | null;
  statement: Statement;
  /** Looks for a signal so far. */
  trials: Trials;
  /** Checks so far. */
  checks: readonly CheckListed[];
  formula: DrawnFormula;
  defaults: FitDefaults;
  /** Who reads it; what is folded is remembered for each person. */
  reader: string;
}

function bestOf(fit: Fit | null, draws: FigureDraws | null): NamedPoint | null {
  if (!fit || !draws) return null;
  const index = bestIndex(draws);
  return index < 0
    ? null
    : { label: `Best draw of fit ${fit.number}`, values: drawValues(draws, index, fixedValues(fit)) };
}

/** The notebook: one sheet of sections; chains and posterior show one of its fits. */
export function NotebookSheet(props: NotebookSheetProps) {
  const state = useNotebook(props.notebook);
  const { notebook } = state;
  const [given] = useState(() => unpackMeasurement(props.measurement));
  const measurement = useVersion(given, notebook.measurement.version);
  const [chosen, setChosen] = useState<string | null>(props.fit?.id ?? null);
  const { fit, put, take } = useFit(chosen, props.fit);
  const stream = usePageEvents(notebook.id, fit && isRunning(fit.status) ? fit.id : null, {
    onNotebook: state.put,
    onFit: take,
  });
  const draws = useDraws(fit);
  const fitted = useVersion(given, fit?.snapshot.measurementVersion ?? measurement.version);

  // The notebook's own list of fits follows when one begins, ends or is taken up again.
  const refresh = useEffectEvent(() => void state.refresh());
  const listedAs = notebook.fits.find(({ id }) => id === chosen)?.status;
  const running = fit ? isRunning(fit.status) : null;
  useEffect(() => {
    if (running !== null && listedAs !== undefined && isRunning(listedAs) !== running) refresh();
  }, [running, listedAs]);

  const cut = useDraft<MeasurementSettings>(
    {
      cuts: notebook.cuts,
      likelihood: notebook.likelihood,
      alsoMeasurements: furtherOf(notebook),
      sharedMocks: notebook.sharedMocks,
    },
    notebook.revision,
  );
  const [givenFurther] = useState(() => props.further.map(unpackMeasurement));
  const others = cut.value.alsoMeasurements;
  const further = useFurther(
    givenFurther,
    others.map(({ measurement: id, version }) => ({ id, version })),
  );
  const standing = useFurther(givenFurther, notebook.also);
  const template = useDraft(
    { id: notebook.template.id, options: notebook.template.options },
    notebook.revision,
  );
  const priors = useDraft<Priors>(notebook.priors, notebook.revision);

  const words = useDraft(notebook.statement, notebook.revision);
  const statement = useStatement(notebook, props.statement, null) ?? props.statement;

  const keptKey = JSON.stringify(cut.value.cuts);
  // Predictions have the parameters of the measurements that stand, with the cuts that are being tried.
  const furtherKey = JSON.stringify(
    notebook.also.map(({ id, cuts }) => others.find((each) => each.measurement === id)?.cuts ?? cuts),
  );
  const points = useMemo(() => {
    const cuts = JSON.parse(furtherKey) as Notebook['cuts'][];
    return keepTogether(
      measurement,
      JSON.parse(keptKey) as Notebook['cuts'],
      (standing ?? []).map((each, k) => ({ measurement: each, cuts: cuts[k] })),
    );
  }, [measurement, keptKey, furtherKey, standing]);
  const comparison = useComparison(notebook);
  const stored = useMemo(() => {
    const tried = tryPrediction(notebook.template, points);
    return 'prediction' in tried ? tried.prediction : null;
  }, [notebook.template, points]);
  const quantities = useMemo(
    () =>
      quantitiesOf(
        fit ? fit.snapshot.template : notebook.template,
        fit ? labelsOfFit(fit, notebook) : measurementLabels([notebook.measurement, ...notebook.also]),
      ),
    [fit, notebook],
  );
  const frozen = fit?.snapshot ?? null;
  const furtherOfShown = useMemo(
    () => (frozen ? furtherOfFit(frozen, standing ?? []) : []),
    [frozen, standing],
  );
  const scans = useScans(notebook.id, props.trials);
  const checks = useChecks(notebook.id, props.checks);
  const found = useMemo(
    () => [bestOf(fit, draws), bestOfScan(scans.scan)].filter((point) => point !== null),
    [fit, draws, scans.scan],
  );

  const states = {
    measurement: sectionState(cut.changed, notebook),
    template: sectionState(template.changed, notebook),
    scan: scanState(scans.trials, scans.scan, notebook),
    priors: sectionState(priors.changed, notebook),
    chains: chainsState(fit, notebook),
    posterior: posteriorState(fit, notebook),
    comparison: comparisonState(notebook),
    checks: checksState(checks, notebook),
    statement: statementState(statement, words.changed),
  };
  const storageKey = foldKey(notebook.id, props.reader);
  const folds = useFolds(storageKey, states);
  const fold = (id: SectionId): SectionFold => ({ state: folds.of(id), onToggle: () => folds.toggle(id) });
  const unsaved = (
    [
      ['measurement', cut.changed],
      ['template', template.changed],
      ['priors', priors.changed],
    ] as const
  ).flatMap(([id, changed]) => (changed ? [sectionNumber(id)] : []));

  function show(id: string) {
    setChosen(id);
    const number = notebook.fits.find((each) => each.id === id)?.number;
    if (number !== undefined) window.history.replaceState(null, '', `?fit=${number}${window.location.hash}`);
  }

  /** Goes to a fit's posterior, as a link to it would: address, section and focus. */
  function goTo(id: string) {
    setChosen(id);
    const number = notebook.fits.find((each) => each.id === id)?.number;
    if (number === undefined) return;
    window.history.pushState(null, '', `?fit=${number}#posterior`);
    folds.open('#posterior');
    const section = document.getElementById('posterior');
    section?.scrollIntoView();
    section?.querySelector<HTMLElement>('h2 button')?.focus({ preventScroll: true });
  }

  async function started(id: string) {
    await state.refresh();
    setChosen(id);
    window.history.replaceState(null, '', window.location.pathname);
  }

  return (
    <Sheet contents={<Contents label="Sections" entries={contentsEntries(states)} onGo={folds.open} />}>
      <NotebookHead
        state={state}
        measurement={measurement}
        fit={fit}
        stream={stream}
        abstract={<Abstract notebook={notebook} measurement={measurement} fit={fit} />}
      />
      <MeasurementSection
        state={state}
        measurement={measurement}
        further={further ?? []}
        draft={cut}
        fold={fold('measurement')}
      />
      <TemplateSection
        state={state}
        measurement={measurement}
        points={points}
        draft={template}
        drawn={props.formula}
        found={found}
        fold={fold('template')}
      />
      <ScanSection notebook={notebook} points={points} handle={scans} unsaved={unsaved} fold={fold('scan')} />
      <PriorsSection
        state={state}
        measurement={measurement}
        prediction={stored}
        draft={priors}
        fold={fold('priors')}
      />
      <ChainsSection
        notebook={notebook}
        fit={fit}
        draws={draws}
        connection={running ? stream.connection : { kind: 'off' }}
        quantities={quantities}
        defaults={props.defaults}
        unsaved={unsaved}
        fold={fold('chains')}
        onFit={put}
        onShow={show}
        onStarted={started}
      />
      <PosteriorSection
        notebook={notebook}
        measurement={fitted}
        further={furtherOfShown}
        fit={fit}
        draws={draws}
        quantities={quantities}
        fold={fold('posterior')}
      />
      <ComparisonSection
        notebook={notebook}
        comparison={comparison}
        unsaved={unsaved}
        fold={fold('comparison')}
        onShow={show}
        onStarted={state.refresh}
      />
      <ChecksSection notebook={notebook} handle={checks} unsaved={unsaved} fold={fold('checks')} />
      <StatementSection
        number={sectionNumber('statement')}
        state={state}
        statement={statement}
        sectionState={states.statement}
        draft={words}
        fold={fold('statement')}
        onShow={goTo}
      />
      {[notebook.measurement, ...notebook.also].some(({ version }) => version > 1) ? (
        <Shifts notebook={notebook} />
      ) : null}
      <FoldScript storageKey={storageKey} />
      <SheetRow>
        <BeatEnd />
      </SheetRow>
    </Sheet>
  );
}
