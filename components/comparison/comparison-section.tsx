'use client';

import { isRunning } from '@/components/fit/fit-words';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';
import type { SectionFold } from '@/components/notebook/use-folds';
import { Caution } from '@/components/ui/caution';
import { Section, Subheading } from '@/components/ui/section';
import type { State } from '@/components/ui/state-word';
import { capital, counted, listed } from '@/components/words/counts';
import type { ComparedFit, Comparison, Notebook } from '@/lib/schemas';
import { defaultFieldCounts } from '@/lib/schemas/field-counts';
import { CompareForm } from './compare-form';
import { CountFigure, type CountPoint } from './count-figure';
import { CountTable } from './count-table';
import { fieldsInWords, fitsById } from './comparison-words';
import { FitsTable } from './fits-table';
import { SharedTable } from './shared-table';
import { WidthsPart } from './widths-part';

export function comparisonState(notebook: Pick<Notebook, 'blind' | 'fits'>): State {
  if (notebook.blind) return { kind: 'blind', word: 'blind' };
  const { fits } = notebook;
  if (!fits.length) return { kind: 'wait', word: `waits for ${sectionNumber('chains')}` };
  const running = fits.filter(({ status }) => isRunning(status)).length;
  if (running) return { kind: 'run', word: `${counted(running, 'fit')} under way` };
  return { kind: 'ok', word: counted(fits.length, 'fit') };
}

/** What is compared, in one sentence. */
export function comparisonSentence(notebook: Pick<Notebook, 'blind' | 'fits'>): string {
  if (notebook.blind) return 'Withheld until the measurement is unblinded.';
  const { fits } = notebook;
  if (!fits.length) return 'No fit to compare yet.';
  return `${capital(counted(fits.length, 'fit'))} side by side.`;
}

/** Bayes factors for the figure: to no field where that has an evidence, else to the best. */
function pointsOf(counts: Comparison['counts']): { points: CountPoint[]; against: string } {
  const toNone = counts.some(({ lnBayesNone }) => lnBayesNone);
  const points = counts.flatMap(({ fields, lnBayesNone, lnBayesBest }) => {
    const factor = toNone ? lnBayesNone : lnBayesBest;
    return factor ? [{ fields, value: factor.value, error: factor.error }] : [];
  });
  return { points, against: toNone ? 'no field' : 'the best' };
}

function NumberOfFields({
  comparison,
  fits,
}: {
  comparison: Comparison;
  fits: ReadonlyMap<string, ComparedFit>;
}) {
  const counts = comparison.counts.filter(
    ({ fields, fit }) => fit !== null || defaultFieldCounts.includes(fields),
  );
  const { points, against } = pointsOf(counts);
  const compared = counts.flatMap(({ fit }) => (fit ? (fits.get(fit) ?? []) : []));
  return (
    <>
      <CountTable counts={counts} fits={fits} />
      {points.length > 1 ? (
        <CountFigure number={figureNumber('bayes-factors')} points={points} against={against} />
      ) : null}
      <Caution>
        Bayes factors depend on the amplitude prior’s width: a prior twice as wide takes about ln 2 off for
        each amplitude that the data settle. They compare the models that are listed, and say nothing of
        others.
      </Caution>
      {points.length > 1 ? <WidthsPart comparison={comparison} /> : null}
      <SharedTable fits={compared} />
    </>
  );
}

export interface ComparisonSectionProps {
  notebook: Notebook;
  comparison: Comparison | null;
  /** Sections with changes that aren't saved. */
  unsaved: readonly number[];
  fold: SectionFold;
  onShow: (id: string) => void;
  onStarted: () => Promise<unknown> | unknown;
}

/** The notebook's fits side by side, and the number of fields as one command. */
export function ComparisonSection(props: ComparisonSectionProps) {
  const { notebook, comparison, unsaved, fold } = props;
  const fits = comparison ? fitsById(comparison) : null;
  const some = fits !== null && fits.size > 0;
  const reason = unsaved.length
    ? `Save or drop the changes of section ${listed(unsaved.map(String))} first.`
    : undefined;
  return (
    <Section
      id="comparison"
      number={sectionNumber('comparison')}
      title="Comparison"
      state={comparisonState(notebook)}
      fold={{ ...fold, sentence: comparisonSentence(notebook) }}
    >
      {notebook.blind ? (
        <p>Evidences and every parameter are withheld until the measurement is unblinded.</p>
      ) : (
        <>
          {comparison?.noFamily ? (
            <p>{comparison.noFamily}</p>
          ) : (
            <p>
              One command fits the notebook’s template with {fieldsInWords(0)}, {fieldsInWords(1)} and{' '}
              {fieldsInWords(2)}: the same numbers, bins, likelihood, background and priors, a further field
              with the priors of the one before it. Each is a fit like any other, with a revision of its own;
              the notebook’s settings stay.
            </p>
          )}
          {comparison && !comparison.noFamily && notebook.may.includes('fit.start') ? (
            <CompareForm notebookId={notebook.id} reason={reason} onStarted={props.onStarted} />
          ) : null}
          {comparison && fits && some ? (
            <>
              {comparison.noFamily ? null : <NumberOfFields comparison={comparison} fits={fits} />}
              <Subheading>All fits of this notebook</Subheading>
              {comparison.sets.map((set) => (
                <FitsTable key={set.apart ?? 'standing'} set={set} onShow={props.onShow} />
              ))}
              <p className="text-small text-ink-2">
                Evidences from mocks are of the Sellentin–Heavens likelihood for every model, also where the
                matched form is sampled, since that one’s exponent depends on the number of parameters.
              </p>
            </>
          ) : null}
        </>
      )}
    </Section>
  );
}
