'use client';

import dynamic from 'next/dynamic';
import { isRunning } from '@/components/fit/fit-words';
import { sectionNumber } from '@/components/notebook/sections';
import type { SectionFold } from '@/components/notebook/use-folds';
import { Section, Subheading } from '@/components/ui/section';
import type { State } from '@/components/ui/state-word';
import { capital, counted, listed } from '@/components/words/counts';
import type { Comparison, Notebook } from '@/lib/schemas';
import { CompareForm } from './compare-form';
import { fieldsInWords, fitsById } from './comparison-words';
import { FitsTable } from './fits-table';

/** Tables and figures of a comparison are loaded where there is one. */
const NumberOfFields = dynamic(() => import('./number-of-fields').then((module) => module.NumberOfFields));

/** True once two numbers of fields have a fit each: one alone compares nothing. */
const compares = ({ counts, noFamily }: Comparison): boolean =>
  !noFamily && counts.filter(({ fit }) => fit !== null).length > 1;

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
  if (fits.length === 1) return 'One fit, and none beside it yet.';
  return `${capital(counted(fits.length, 'fit'))} side by side.`;
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
              {compares(comparison) ? <NumberOfFields comparison={comparison} fits={fits} /> : null}
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
