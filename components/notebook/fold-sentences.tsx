import type { ReactNode } from 'react';
import { posteriorSentence } from '@/components/fit/posterior-figures';
import { covarianceInWords } from '@/components/measurement/measurement-words';
import { capital, counted, inWords } from '@/components/words/counts';
import { formatCount } from '@/lib/figures/format';
import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { findTemplate, TemplateError, type ParameterDeclaration, type Prior } from '@/lib/templates';
import { fitInWords, TemplateInWords } from './abstract';
import { togetherInWords } from './further-words';
import { keptRows } from './kept-points';
import { likelihoods } from './likelihood-words';
import type { TemplateSettings } from './prediction';
import { priorInWords } from './prior-words';
import { sectionNumber } from './sections';

/** "36 of 40 bins, covariance from 600 mocks, likelihood t with matched prior." */
export function measurementSentence(
  measurement: Measurement,
  {
    cuts,
    likelihood,
    alsoMeasurements,
    sharedMocks,
  }: Pick<Notebook, 'cuts' | 'likelihood'> & {
    alsoMeasurements: readonly unknown[];
    sharedMocks: boolean;
  },
): string {
  const kept = keptRows(measurement.points, cuts).length;
  const all = measurement.rows;
  const bins = kept === all ? `All ${counted(all, 'bin')}` : `${formatCount(kept)} of ${counted(all, 'bin')}`;
  return `${bins}, ${covarianceInWords(measurement)}${togetherInWords(alsoMeasurements.length, sharedMocks)}, likelihood ${likelihoods[likelihood.kind].label}.`;
}

export function templateSentence(template: TemplateSettings): ReactNode {
  return (
    <>
      <TemplateInWords template={template} initial />.
    </>
  );
}

function parametersOf({ id, options }: TemplateSettings): readonly ParameterDeclaration[] {
  try {
    return findTemplate(id).parameters(options);
  } catch (error) {
    if (error instanceof TemplateError) return [];
    throw error;
  }
}

/** "Nine parameters, of which one is fixed; mass 1 uniform 1 to 12." */
export function priorsSentence(template: TemplateSettings, priors: Readonly<Record<string, Prior>>): string {
  const parameters = parametersOf(template);
  if (!parameters.length) return `Waits for section ${sectionNumber('template')}.`;
  const of = (declaration: ParameterDeclaration) => priors[declaration.name] ?? declaration.defaultPrior;
  const fixed = parameters.filter((each) => of(each).kind === 'fixed').length;
  const share = fixed ? `, of which ${fixed === 1 ? 'one is' : `${inWords(fixed)} are`} fixed` : '';
  const [first] = parameters;
  return `${capital(counted(parameters.length, 'parameter'))}${share}; ${first.label} ${priorInWords(of(first), first)}.`;
}

/** "Fit 2 has met the gate. Four replicas of 1 200 draws." */
export function chainsSentence(fit: Fit | null): string {
  if (!fit) return 'No fit yet.';
  const { progress, replicas } = fit;
  const drawn =
    progress.draws > 0
      ? `${capital(counted(replicas, 'replica'))} of ${counted(progress.draws, 'draw')}`
      : `${capital(counted(replicas, 'replica'))}, no draw kept yet`;
  return `${fitInWords(fit)} ${drawn}.`;
}

/** What the posterior is made from; nothing of a blind measurement. */
export function posteriorFoldSentence(fit: Fit | null, blind: boolean): string {
  if (blind) return 'Withheld until the measurement is unblinded.';
  if (!fit || fit.progress.draws === 0) return `Waits for section ${sectionNumber('chains')}.`;
  return posteriorSentence(fit);
}
