/** The notebook's sections and figures in their order on the page; their numbers follow from it. */

const sections = [
  { id: 'measurement', title: 'Measurement' },
  { id: 'template', title: 'Template' },
  { id: 'scan', title: 'Coverage and scan' },
  { id: 'priors', title: 'Priors' },
  { id: 'chains', title: 'Chains' },
  { id: 'posterior', title: 'Posterior' },
  { id: 'comparison', title: 'Comparison' },
  { id: 'checks', title: 'Checks' },
  { id: 'statement', title: 'Statement' },
] as const;

export type SectionId = (typeof sections)[number]['id'];
export const sectionIds: readonly SectionId[] = sections.map(({ id }) => id);

/** From 1, in the order of the page. */
export function sectionNumber(id: SectionId): number {
  return sectionIds.indexOf(id) + 1;
}

export function sectionTitle(id: SectionId): string {
  return sections[sectionNumber(id) - 1].title;
}

const figures = [
  'measurement',
  'template',
  'accuracy',
  'window',
  'scan',
  'plane',
  'prior-predictive',
  'traces',
  'corner',
  'best-fit',
  'bayes-factors',
  'prior-widths',
  'rank-histograms',
  'rank-differences',
] as const;
export type NotebookFigure = (typeof figures)[number];

/** From 1, in the order of the page. */
export function figureNumber(figure: NotebookFigure): number {
  return figures.indexOf(figure) + 1;
}
