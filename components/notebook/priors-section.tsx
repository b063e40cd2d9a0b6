'use client';

import { useDeferredValue, useMemo } from 'react';
import { PointsFigure } from '@/components/figures/points-figure';
import { RequestMessage } from '@/components/api/request-message';
import { Message } from '@/components/ui/message';
import { useShown } from '@/components/ui/fold';
import { Section } from '@/components/ui/section';
import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { counted, inWords, plain } from '@/components/words/counts';
import { inducedMarginals, massChains, MassOrder } from '@/lib/inference/mass-order';
import type { MassPrior, OrderedMarginal } from '@/lib/inference/ordered-masses';
import type { PredictiveBand } from '@/lib/inference/prior-predictive';
import type { Measurement } from '@/lib/schemas';
import type { CompiledTemplate, Prior } from '@/lib/templates';
import { ConflictMessage, twoStand } from './conflict-message';
import { priorsSentence } from './fold-sentences';
import { keptBand } from './kept-band';
import type { KeptPoints } from './kept-points';
import type { Prediction } from './prediction';
import { findPriorFaults } from './prior-faults';
import { ParameterName, PriorDrawing, PriorFields } from './prior-row';
import { priorInWords } from './prior-words';
import { SaveRow } from './save-row';
import { ColumnSwitch, isSwitchedOff } from './column-switch';
import { conflictOf, type Draft } from './section-draft';
import { SectionRecord } from './section-record';
import { sectionState } from './section-states';
import type { SectionFold } from './use-folds';
import { useSectionSave, type NotebookState } from './use-notebook';
import { figureNumber, sectionNumber } from './sections';

export type Priors = Readonly<Record<string, Prior>>;

export interface PriorsSectionProps {
  state: NotebookState;
  measurement: Measurement;
  /** The stored template on the stored cut; null where it can't be evaluated. */
  prediction: Prediction | null;
  draft: Draft<Priors>;
  fold: SectionFold;
}

/** Draws from the priors behind the band. */
const draws = 400;

function PriorsTable({
  template,
  draft,
  faults,
  editable,
}: {
  template: CompiledTemplate;
  draft: Draft<Priors>;
  faults: ReturnType<typeof findPriorFaults>;
  editable: boolean;
}) {
  const angles = template.parameters.filter(({ role }) => role === 'angle');
  const induced = useInduced(template, draft.value, faults);
  const change = (name: string, prior: Prior) => {
    const next: Record<string, Prior> = { ...draft.value, [name]: prior };
    // The isotropic prior is one density of all angles: they take it, and leave it, together.
    if (angles.some((angle) => angle.name === name)) {
      const was = draft.value[name]?.kind === 'isotropic';
      for (const angle of angles) {
        if (angle.name === name) continue;
        if (prior.kind === 'isotropic') next[angle.name] = prior;
        else if (was && next[angle.name]?.kind === 'isotropic') next[angle.name] = prior;
      }
    }
    draft.change(next);
  };
  return (
    <DataTable
      ruled
      label="Priors"
      phoneColumns="minmax(0,1fr) 120px"
      columns={[
        { key: 'parameter', head: 'Parameter', middle: true, phone: { area: '1 / 1' } },
        { key: 'prior', head: 'Prior', middle: true, phone: { area: '2 / 1 / 3 / 3' } },
        { key: 'density', head: 'Density', middle: true, phone: { area: '1 / 2' } },
      ]}
      rows={template.parameters.map((declaration) => {
        const { name } = declaration;
        const prior = draft.value[name] ?? declaration.defaultPrior;
        const fault = faults.byParameter[name];
        return {
          key: name,
          cells: {
            parameter: (
              <>
                <ParameterName declaration={declaration} />
                {declaration.role === 'column' && editable ? (
                  <ColumnSwitch
                    name={name}
                    on={!isSwitchedOff(prior)}
                    onSwitch={(on) =>
                      change(name, on ? declaration.defaultPrior : { kind: 'fixed', value: 0 })
                    }
                  />
                ) : null}
              </>
            ),
            prior: editable ? (
              <>
                <PriorFields
                  declaration={declaration}
                  prior={prior}
                  faults={faults.byField[name] ?? {}}
                  onPrior={(next) => change(name, next)}
                />
                {fault ? (
                  <p className="mt-[3px] mb-0 font-controls text-note text-ink-2">
                    <StateWord kind="bad">Error</StateWord> {fault}
                  </p>
                ) : null}
              </>
            ) : (
              priorInWords(prior, declaration)
            ),
            density: (
              <PriorDrawing
                declaration={declaration}
                prior={prior}
                angle={
                  declaration.role === 'angle'
                    ? { fields: angles.length + 1, index: angles.indexOf(declaration) }
                    : null
                }
                induced={induced.get(name) ?? null}
              />
            ),
          },
        };
      })}
    />
  );
}

/** The priors that were changed here: another person's change of others is left alone. */
export function ownPriors({ value, origin }: Pick<Draft<Priors>, 'value' | 'origin'>): Record<string, Prior> {
  return Object.fromEntries(
    Object.entries(value).filter(([name, prior]) => JSON.stringify(prior) !== JSON.stringify(origin[name])),
  );
}

/** The priors of the fields' masses, in the order of the fields. */
const massPriors = (template: CompiledTemplate, priors: Priors): MassPrior[] =>
  template.blocks.map(({ mass }) => {
    const { name, defaultPrior } = template.parameters[mass];
    return (priors[name] ?? defaultPrior) as MassPrior;
  });

/** Share of independent draws in order below which drawing from the priors would keep the page waiting. */
const rare = 1e-3;

const shareInOrder = (template: CompiledTemplate, priors: Priors): number =>
  Math.exp(
    new MassOrder(
      template.blocks.map(({ kind }) => kind),
      massPriors(template, priors),
    ).logProbability,
  );

/** What order leaves of the masses' priors, by name; nothing while a prior has to be mended. */
function useInduced(
  template: CompiledTemplate,
  priors: Priors,
  faults: ReturnType<typeof findPriorFaults>,
): ReadonlyMap<string, OrderedMarginal> {
  const sound = faults.joint === null && Object.keys(faults.byParameter).length === 0;
  // Other priors are typed into without these being computed again.
  const key = JSON.stringify(massPriors(template, priors));
  return useMemo(() => {
    if (!sound) return new Map<string, OrderedMarginal>();
    const marginals = inducedMarginals(
      template.blocks.map(({ kind }) => kind),
      JSON.parse(key) as MassPrior[],
    );
    return new Map(
      template.blocks.flatMap(({ mass }, field) => {
        const marginal = marginals[field];
        return marginal ? [[template.parameters[mass].name, marginal] as const] : [];
      }),
    );
  }, [template, key, sound]);
}

/** Says what order does to the joint prior, and what the two curves of a mass are. */
function OrderNote({ template, priors }: { template: CompiledTemplate; priors: Priors }) {
  const kinds = template.blocks.map(({ kind }) => kind);
  const chains = massChains(kinds).filter((chain) => chain.length > 1);
  if (chains.length === 0) return null;
  const z = shareInOrder(template, priors);
  return (
    <p className="max-w-figure text-small text-ink-2">
      Masses are put in order,{' '}
      {chains.map((chain, i) => (
        <span key={chain[0]}>
          {i ? ' and ' : ''}
          {[...chain]
            .sort((a, b) => a - b)
            .map((field, place) => (
              <span key={field} className="whitespace-nowrap">
                {place ? (kinds[field] === 'heavy' ? ' < ' : ' > ') : ''}
                <Sym {...template.parameters[template.blocks[field].mass].symbol} />
              </span>
            ))}
        </span>
      ))}
      . Of independent draws a share <Num>Z = {plain(z, 4)}</Num> is in order; the joint prior is divided by
      it. Grey: the density as stated. Line: what order leaves of it.
      {z < rare
        ? ' So few are in order that no band of predictions is drawn: bring the ranges of the masses nearer to their order.'
        : ''}
    </p>
  );
}

function usePredictive(
  prediction: Prediction | null,
  priors: Priors,
  sound: boolean,
): PredictiveBand[] | null {
  const settled = useDeferredValue(priors);
  return useMemo(() => {
    if (!prediction || !sound) return null;
    if (findPriorFaults(prediction.fine, settled).joint !== null) return null;
    if (Object.keys(findPriorFaults(prediction.fine, settled).byParameter).length) return null;
    if (shareInOrder(prediction.fine, settled) < rare) return null;
    return prediction.panels.map((panel) => keptBand(panel, settled, draws));
  }, [prediction, settled, sound]);
}

/** What is believed before the data, and what that claims about them. */
export function PriorsSection(props: PriorsSectionProps) {
  const { state, measurement, prediction, draft, fold } = props;
  const { notebook } = state;
  const section = useSectionSave(state);
  const template = prediction?.fine ?? null;
  const faults = useMemo(
    () => (template ? findPriorFaults(template, draft.value) : { byField: {}, byParameter: {}, joint: null }),
    [template, draft.value],
  );
  const wrong = Object.keys(faults.byParameter).length;
  const shown = useShown(fold);
  const band = usePredictive(prediction, draft.value, shown && wrong === 0 && faults.joint === null);
  const editable = notebook.may.includes('notebook.edit');
  const conflict = conflictOf(draft, notebook, section);

  async function save(base: number) {
    if (await section.save({ priors: ownPriors(draft) }, base)) draft.reset();
  }

  return (
    <Section
      id="priors"
      number={sectionNumber('priors')}
      title="Priors"
      state={sectionState(draft.changed, notebook)}
      fold={{ ...fold, sentence: priorsSentence(notebook.template, draft.value) }}
      margin={<SectionRecord notebook={notebook} section="priors" />}
    >
      {template && prediction ? (
        <>
          <p>
            {template.parameters.length === 1
              ? 'One parameter has a prior.'
              : `Each of the ${inWords(template.parameters.length)} parameters has a prior; a fixed one isn’t sampled.`}
          </p>
          <PriorsTable template={template} draft={draft} faults={faults} editable={editable} />
          {wrong === 0 ? <OrderNote template={template} priors={draft.value} /> : null}
          {faults.joint ? (
            <Message level="error" title="The priors don’t go together">
              <p>{faults.joint}</p>
            </Message>
          ) : null}
          {editable ? (
            <SaveRow
              draft={draft}
              revision={notebook.revision}
              saving={section.saving}
              fault={
                conflict
                  ? twoStand
                  : wrong
                    ? `${counted(wrong, 'prior').replace(/^one/, 'One')} has to be mended first.`
                    : faults.joint
                      ? 'The priors have to go together first.'
                      : undefined
              }
              onSave={() => void save(draft.base)}
            />
          ) : null}
          {conflict ? (
            <ConflictMessage
              conflict={conflict}
              section={section}
              sides={template.parameters
                .filter(({ name }) => ownPriors(draft)[name])
                .map(({ name, label, defaultPrior }) => ({
                  key: name,
                  what: label,
                  theirs: priorInWords(conflict.theirs.priors[name] ?? defaultPrior),
                  mine: priorInWords(draft.value[name] ?? defaultPrior),
                }))}
              onMine={(base) => void save(base)}
              onTheirs={() => {
                section.settle();
                draft.reset();
                void state.put(conflict.theirs);
              }}
            />
          ) : null}
          <RequestMessage error={section.error} title={`Section ${sectionNumber('priors')} was not saved`} />
          {band && band.length === prediction.panels.length
            ? prediction.panels.map((panel, k) => (
                <PointsFigure
                  key={panel.label}
                  number={k === 0 ? figureNumber('prior-predictive') : undefined}
                  label={`Range of predictions of the priors over the points${band.length > 1 ? ` of ${panel.label}` : ''}`}
                  fileName={k === 0 ? 'prior-predictive' : `prior-predictive-${k + 1}`}
                  points={
                    measurement.blind
                      ? undefined
                      : {
                          kappa: panel.points.kappa,
                          value: panel.points.S,
                          error: panel.points.sigma,
                          lo: panel.points.lo ?? undefined,
                          hi: panel.points.hi ?? undefined,
                        }
                  }
                  band={{
                    kappa: panel.seen.kappa,
                    ...band[k],
                    label: '68 and 95 % of the priors’ draws',
                  }}
                  yDomain={bandDomain(band[k], panel.points)}
                  caption={
                    k > 0 ? (
                      <>
                        The same over the {counted(panel.points.rows.length, 'bin')} of {panel.label}.
                      </>
                    ) : (
                      <>
                        What the priors claim before any data: at each <i className="sym">κ</i> the range of{' '}
                        {draws} predictions drawn from them, over the{' '}
                        {counted(panel.points.rows.length, 'bin')}
                        {band.length > 1 ? ` of ${panel.label}` : ''}.
                      </>
                    )
                  }
                />
              ))
            : null}
        </>
      ) : (
        <p className="text-ink-2">
          The priors stand here once section {sectionNumber('template')} can be evaluated.
        </p>
      )}
    </Section>
  );
}

/** Room for the band's 68 % and the points, so that a wide prior doesn't squeeze the points flat unseen. */
function bandDomain(band: PredictiveBand, { S, sigma }: KeptPoints): [number, number] {
  const ends = [
    ...band.lo68,
    ...band.hi68,
    ...Array.from(S, (value, i) => value - sigma[i]),
    ...Array.from(S, (value, i) => value + sigma[i]),
  ].filter(Number.isFinite);
  const [lo, hi] = [Math.min(...ends), Math.max(...ends)];
  const room = 0.08 * (hi - lo || 1);
  return [lo - room, hi + room];
}
