'use client';

import dynamic from 'next/dynamic';
import { useMemo, useState } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { RequestMessage } from '@/components/api/request-message';
import { WithheldFigure } from '@/components/figures/withheld-figure';
import { Button, Buttons } from '@/components/ui/button';
import { Message } from '@/components/ui/message';
import { Num } from '@/components/ui/num';
import { Opened } from '@/components/ui/opened';
import { Sym } from '@/components/ui/sym';
import { useShown } from '@/components/ui/fold';
import { Section, Subheading } from '@/components/ui/section';
import { counted } from '@/components/words/counts';
import { Raised } from '@/components/words/raised';
import { formatNumber } from '@/lib/figures/format';
import type { Measurement } from '@/lib/schemas';
import { findTemplate, TemplateError, withTheory, type Prior } from '@/lib/templates';
import { withBestAmplitudes } from './best-amplitudes';
import { ConflictMessage, twoStand } from './conflict-message';
import { templateSentence } from './fold-sentences';
import type { KeptPoints } from './kept-points';
import { LiveFormula, type DrawnFormula } from './live-formula';
import {
  compilePrediction,
  curvesOf,
  judge,
  ofPanel,
  type Prediction,
  type TemplateSettings,
} from './prediction';
import { startValues } from './prior-values';
import { SaveRow } from './save-row';
import { conflictOf, type Draft } from './section-draft';
import { SectionRecord } from './section-record';
import { sectionState } from './section-states';
import { TemplateCautions } from './template-cautions';
import { TemplateForm } from './template-form';
import { TemplateSliders } from './template-sliders';
import { templateSides, weightInWords } from './option-words';
import type { SectionFold } from './use-folds';
import { useSectionSave, type NotebookState } from './use-notebook';
import { figureNumber, sectionNumber } from './sections';

/** Compares with the exact shape; loaded when it is opened. */
const AccuracyPart = dynamic(() => import('./accuracy-part').then((module) => module.AccuracyPart));

/** Templates of the squeezed limit; the others are exact, or have no field. */
const squeezed = new Set(['free-phase', 'locked-squeezed', 'light']);

/** A point of parameter space that sliders can be set to. */
export interface NamedPoint {
  /** "Best draw of fit 3" */
  label: string;
  values: Readonly<Record<string, number>>;
  /** Parameters that it has no value for stay as they are, but for amplitudes, which are fitted there. */
  fillIn?: boolean;
}

export interface TemplateSectionProps {
  state: NotebookState;
  measurement: Measurement;
  points: KeptPoints;
  draft: Draft<TemplateSettings>;
  drawn: DrawnFormula;
  /** Points that fits and scans found. */
  found: readonly NamedPoint[];
  fold: SectionFold;
}

/** The template on the points, or the fault that keeps it from being evaluated. */
export function tryPrediction(
  settings: TemplateSettings,
  points: KeptPoints,
): { prediction: Prediction } | { fault: string } {
  if ([points, ...(points.together?.further ?? [])].some(({ rows }) => rows.length === 0))
    return { fault: 'The cut keeps no bin, so nothing can be predicted.' };
  try {
    return { prediction: compilePrediction(settings, points) };
  } catch (error) {
    if (error instanceof TemplateError) return { fault: `${error.message}.` };
    throw error;
  }
}

function Explore({
  settings,
  measurement,
  prediction,
  priors,
  found,
}: {
  settings: TemplateSettings;
  measurement: Measurement;
  prediction: Prediction;
  priors: Readonly<Record<string, Prior>>;
  found: readonly NamedPoint[];
}) {
  const { parameters } = prediction.fine;
  const [set, setSet] = useState<Readonly<Record<string, number>>>({});
  const start = useMemo(
    () => withBestAmplitudes(prediction, parameters, priors, startValues(prediction.fine, priors)),
    [prediction, parameters, priors],
  );
  const x = useMemo(
    () => Float64Array.from(parameters, ({ name }, i) => set[name] ?? start[i]),
    [parameters, set, start],
  );
  const curves = useMemo(() => prediction.panels.map((panel) => curvesOf(panel, x)), [prediction, x]);
  const several = prediction.panels.length > 1;
  const judged = useMemo(() => judge(prediction, x), [prediction, x]);
  const { points } = prediction;
  const fields = prediction.fine.blocks.length;
  const weight = weightInWords(settings.options, points.lo !== null);
  const named = (values: readonly number[]) =>
    Object.fromEntries(parameters.map(({ name }, i) => [name, values[i]]));
  const known = ({ values }: NamedPoint) => parameters.filter(({ name }) => values[name] !== undefined);
  const usable = found.filter((point) =>
    point.fillIn ? known(point).length > 0 : known(point).length === parameters.length,
  );

  function go(point: NamedPoint) {
    const there = { ...set, ...point.values };
    if (known(point).length === parameters.length) return setSet(there);
    const from = parameters.map(({ name }, i) => point.values[name] ?? x[i]);
    setSet({ ...there, ...named([...withBestAmplitudes(prediction, parameters, priors, from)]) });
  }

  return (
    <>
      {measurement.blind ? (
        <WithheldFigure
          number={figureNumber('template')}
          label="Prediction over the points"
          caption="Prediction over the points."
        />
      ) : (
        prediction.panels.map((panel, k) => (
          <PointsFigure
            key={panel.label}
            number={k === 0 ? figureNumber('template') : undefined}
            label={`Prediction at the values of the sliders over the points${several ? ` of ${panel.label}` : ''}`}
            fileName={k === 0 ? 'prediction' : `prediction-${k + 1}`}
            points={{
              kappa: panel.points.kappa,
              value: panel.points.S,
              error: panel.points.sigma,
              lo: panel.points.lo ?? undefined,
              hi: panel.points.hi ?? undefined,
            }}
            curves={curves[k]}
            residuals={ofPanel(judged.residuals, panel)}
            caption={
              k > 0 ? (
                <>
                  The same over the {counted(panel.points.rows.length, 'bin')} of {panel.label}, with its own
                  background.
                </>
              ) : (
                <>
                  Prediction at the values below over the {counted(panel.points.rows.length, 'bin')}
                  {several ? ` of ${panel.label}` : ''}
                  {fields ? `, with ${fields === 1 ? 'the field' : 'each field'} drawn alone` : ''}
                  {fields === 2 ? ' and the envelope of their beat' : ''}
                  {weight ? `, ${weight}` : ''};{' '}
                  <Num>
                    <i className="sym">χ</i>² = {formatNumber(judged.chiSquare, 1)}
                  </Num>
                  {prediction.data.factor ? '' : ' from the errors alone'} for{' '}
                  {counted(prediction.data.rows.length, 'bin')}
                  {several ? ' of all measurements, each with its own covariance' : ''}.
                </>
              )
            }
          />
        ))
      )}
      <TemplateSliders
        template={prediction.fine}
        priors={priors}
        x={x}
        onMove={(values) => setSet({ ...set, ...named(values) })}
      />
      <Buttons>
        {usable.map((point) => (
          <Button key={point.label} onClick={() => go(point)}>
            {point.label}
          </Button>
        ))}
        {measurement.blind ? null : (
          <Button
            onClick={() =>
              setSet({ ...set, ...named([...withBestAmplitudes(prediction, parameters, priors, x)]) })
            }
          >
            Best amplitudes here
          </Button>
        )}
        <Button onClick={() => setSet({})}>Medians of the priors</Button>
      </Buttons>
      <p className="font-controls text-note text-ink-2">
        Moving a slider draws; it changes nothing in the notebook.
        {measurement.blind ? '' : ' At the medians the amplitudes are those that fit best there.'}
      </p>
      <TemplateCautions
        settings={{ id: settings.id, options: prediction.onData.options }}
        parameters={parameters}
        priors={priors}
        highest={(points.hi ?? points.kappa)[points.rows.length - 1]}
      />
    </>
  );
}

/** Which template, its formula, and what it predicts over the points. */
export function TemplateSection(props: TemplateSectionProps) {
  const { state, measurement, points, draft, drawn, found, fold } = props;
  const { notebook } = state;
  const section = useSectionSave(state);
  const settings = draft.value;
  const template = findTemplate(settings.id);
  const shown = useShown(fold);
  const tried = useMemo(
    () => (shown ? tryPrediction(settings, points) : { fault: 'The section is folded.' }),
    [settings, points, shown],
  );
  const editable = notebook.may.includes('notebook.edit');
  const conflict = conflictOf(draft, notebook, section);

  async function save(base: number) {
    if (await section.save({ template: settings }, base)) draft.reset();
  }

  return (
    <Section
      id="template"
      number={sectionNumber('template')}
      title="Template"
      state={sectionState(draft.changed, notebook)}
      fold={{ ...fold, sentence: templateSentence(settings) }}
      margin={<SectionRecord notebook={notebook} section="template" />}
    >
      <p>{template.summary}</p>
      {'prediction' in tried ? (
        <LiveFormula
          formula={withTheory(template.formula(tried.prediction.onData.options), measurement.theory)}
          drawn={drawn}
        />
      ) : null}
      {editable ? (
        <>
          <TemplateForm
            settings={settings}
            hasEdges={points.lo !== null}
            error={section.error}
            onSettings={draft.change}
          />
          <SaveRow
            draft={draft}
            revision={notebook.revision}
            saving={section.saving}
            fault={conflict ? twoStand : 'fault' in tried ? tried.fault : undefined}
            onSave={() => void save(draft.base)}
          />
        </>
      ) : null}
      {conflict ? (
        <ConflictMessage
          conflict={conflict}
          section={section}
          sides={templateSides(conflict.theirs.template, settings)}
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
        title={`Section ${sectionNumber('template')} was not saved`}
        shown={['template.id']}
      />
      <Subheading>What it predicts</Subheading>
      {'prediction' in tried ? (
        <Explore
          settings={settings}
          measurement={measurement}
          prediction={tried.prediction}
          priors={notebook.priors}
          found={found}
        />
      ) : (
        <Message level="warning" title="Nothing can be drawn with these options" quiet>
          <p>{tried.fault}</p>
        </Message>
      )}
      {'prediction' in tried && squeezed.has(settings.id) ? (
        <Opened
          words={
            <>
              How far in <Sym base="κ" /> it holds
            </>
          }
        >
          <AccuracyPart
            settings={settings}
            parameters={tried.prediction.fine.parameters}
            priors={notebook.priors}
            measurement={measurement}
            cuts={notebook.cuts}
            kept={points.rows.length}
            of={points.together ? points.together.labels[0] : null}
          />
        </Opened>
      ) : null}
      {template.assumptions.length ? (
        <p className="mt-3 text-small text-ink-2">
          Assumed: <Raised>{template.assumptions.join(' ')}</Raised>
        </p>
      ) : null}
    </Section>
  );
}
