import { counted, listed, plain } from '@/components/words/counts';
import { leftOutInWords } from '@/components/words/left-out';
import { fieldCount, findTemplate, TemplateError, type ParameterDeclaration } from '@/lib/templates';
import type { Notebook, NotebookSection, Revision } from '@/lib/schemas';
import { assembledParameters } from '@/lib/inference/assembled-template';
import { cutInWords } from './further-words';
import { likelihoods } from './likelihood-words';
import { optionEntries } from './option-words';
import { priorInWords } from './prior-words';
import { templateTitle } from './template-words';

const sectionWords: Record<NotebookSection, string> = {
  title: 'title',
  measurement: 'measurement',
  template: 'template',
  priors: 'priors',
  statement: 'statement',
};

/** "template and priors", "revision 2 brought back"; the first made everything. */
export function revisionInWords({
  revision,
  sections,
  restoredFrom,
}: Pick<Notebook['record'][number], 'revision' | 'sections' | 'restoredFrom'>): string {
  if (restoredFrom !== null) return `revision ${restoredFrom} brought back`;
  return revision === 1 ? 'the beginning' : listed(sections.map((section) => sectionWords[section]));
}

/** "Copied from notebook 3, “Two fields”, as fit 2 froze it" */
export function originInWords(origin: NonNullable<Notebook['origin']>): string {
  const { number, title, revision, fit, droppedBins = 0 } = origin;
  const how = fit === null ? `revision ${revision}` : `as fit ${fit} froze it`;
  const dropped = droppedBins
    ? `; ${counted(droppedBins, 'bin')} left out there ${droppedBins === 1 ? 'isn’t' : 'aren’t'} in this measurement`
    : '';
  return `Copied from notebook ${number}, “${title}”, ${how}${dropped}`;
}

/** What a revision settles, or a notebook as it stands. */
export type Settled = Pick<
  Revision,
  'title' | 'cuts' | 'likelihood' | 'template' | 'priors' | 'also' | 'sharedMocks' | 'statement'
>;

/** One thing that a revision settles, in words. */
export interface SettledLine {
  key: string;
  section: NotebookSection;
  what: string;
  value: string;
}

function parametersOf({ template, also }: Settled): readonly ParameterDeclaration[] {
  try {
    return assembledParameters(
      findTemplate(template.id).parameters(template.options),
      ['measurement 1', ...also.map(({ name }, k) => name ?? `measurement ${k + 2}`)].map((label) => ({
        label,
      })),
    );
  } catch (error) {
    if (error instanceof TemplateError) return [];
    throw error;
  }
}

const fieldsOf = ({ template: { options } }: Settled): number =>
  options.fields === undefined ? 0 : fieldCount(options.fields);

/** Everything that a revision settles, field by field. */
export function settledLines(settled: Settled): SettledLine[] {
  const { title, cuts, likelihood, template, priors, also, sharedMocks, statement } = settled;
  const end = (value: number | undefined) => (value === undefined ? 'no cut' : plain(value, 6));
  const declared = new Map(parametersOf(settled).map((each) => [each.name, each]));
  return [
    { key: 'title', section: 'title', what: 'Title', value: title },
    { key: 'kappaMin', section: 'measurement', what: 'Lowest κ', value: end(cuts.kappaMin) },
    { key: 'kappaMax', section: 'measurement', what: 'Highest κ', value: end(cuts.kappaMax) },
    {
      key: 'excluded',
      section: 'measurement',
      what: 'Bins left out',
      value: leftOutInWords(cuts.excluded ?? []) || 'none',
    },
    ...also.map((each, k) => ({
      key: `further ${k + 2}`,
      section: 'measurement' as const,
      what: `Measurement ${k + 2}`,
      value: `${each.name === null ? 'one that was deleted' : `${each.name}, version ${each.version}`}, ${cutInWords(each.cuts)}`,
    })),
    ...(also.length > 0
      ? [
          {
            key: 'sharedMocks',
            section: 'measurement' as const,
            what: 'Mocks',
            value: sharedMocks ? 'of the same skies' : 'independent',
          },
        ]
      : []),
    {
      key: 'likelihood',
      section: 'measurement',
      what: 'Likelihood',
      value: likelihoods[likelihood.kind].label,
    },
    {
      key: 'template',
      section: 'template',
      what: 'Template',
      value: templateTitle(template.id, fieldsOf(settled)),
    },
    ...optionEntries(template.options).map(({ name, what, value }) => ({
      key: `option ${name}`,
      section: 'template' as const,
      what,
      value,
    })),
    ...Object.entries(priors).map(([name, prior]) => {
      const declaration = declared.get(name);
      return {
        key: `prior ${name}`,
        section: 'priors' as const,
        what: `Prior of ${declaration?.label ?? name}`,
        value: priorInWords(prior, declaration),
      };
    }),
    { key: 'statement', section: 'statement', what: 'Statement', value: statement || 'no words' },
  ];
}

/** One thing in which two revisions differ; null where one of them doesn't have it. */
export interface Difference {
  key: string;
  what: string;
  before: string | null;
  after: string | null;
}

/** What changed from one revision to another, field by field, in the order of the sheet. */
export function differences(before: Settled, after: Settled): Difference[] {
  const [old, now] = [settledLines(before), settledLines(after)];
  const newKeys = new Set(now.map(({ key }) => key));
  const oldValues = new Map(old.map(({ key, value }) => [key, value]));
  const kept = now.flatMap(({ key, what, value }) => {
    const was = oldValues.get(key) ?? null;
    return was === value ? [] : [{ key, what, before: was, after: value }];
  });
  const gone = old
    .filter(({ key }) => !newKeys.has(key))
    .map(({ key, what, value }) => ({ key, what, before: value, after: null }));
  return [...kept, ...gone];
}
