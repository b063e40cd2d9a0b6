import { isDeepStrictEqual } from 'node:util';
import type { NotebookSettings } from '@/models';
import { AppError } from '@/lib/errors';
import { assembledParameters, buildMetric, likelihoodFor, type InferenceSpec } from '@/lib/inference';
import { isFixedColumn, layOutParameters } from '@/lib/inference/parameter-layout';
import { carryExcluded, type ExcludedBin } from '@/lib/measurements';
import type { CreateNotebook, NotebookSection } from '@/lib/schemas';
import { findTemplate, partOfName, type ParameterDeclaration, type Prior } from '@/lib/templates';
import { defaultPrior, type DataScale } from './default-priors';
import { refusingFaults } from './inference-faults';
import {
  cutParts,
  partLabel,
  readColumns,
  specOnParts,
  type CutPart,
  type StoredNumbers,
} from './inference-spec';

/** What a person gave for a notebook, and what stood before. */
export interface SettingsDraft {
  cuts: NotebookSettings['cuts'];
  /** Left out: matched-t where the covariance comes from a known number of mocks, normal else. */
  likelihood?: NotebookSettings['likelihood'];
  template: { id: string; options: Record<string, unknown> };
  /** Priors given now, by name. */
  given: NonNullable<CreateNotebook['priors']>;
  /** Priors that stood; those of parameters that the template has no more are dropped. */
  kept: NotebookSettings['priors'];
  /** Further measurements, whose numbers come with those of the first. */
  also?: NotebookSettings['also'];
  sharedMocks?: boolean;
}

function settlePriors(
  parameters: readonly ParameterDeclaration[],
  { given, kept }: Pick<SettingsDraft, 'given' | 'kept'>,
  dataOf: ((declaration: ParameterDeclaration) => DataScale) | null,
): NotebookSettings['priors'] {
  const names = parameters.map(({ name }) => name);
  const unknown = Object.keys(given).find((name) => !names.includes(name));
  if (unknown !== undefined) {
    const message = `There is no parameter ${unknown}; the template has ${names.join(', ')}.`;
    throw new AppError('invalid', message, [{ path: `priors.${unknown}`, message }]);
  }
  const own = (priors: NotebookSettings['priors'], name: string) =>
    Object.hasOwn(priors, name) ? priors[name] : undefined;
  return Object.fromEntries(
    parameters.map((declaration) => {
      const { name } = declaration;
      const prior: NotebookSettings['priors'][string] | Prior =
        own(given, name) ?? own(kept, name) ?? defaultPrior(declaration, dataOf && dataOf(declaration));
      return [name, { ...prior }];
    }),
  );
}

const defaultLikelihood = (parts: readonly CutPart[]) =>
  likelihoodFor(
    parts.map(({ mockCount, points: { theory } }) => ({
      data: { mockCount },
      ...(theory.covariance ? { theoryCovariance: theory.covariance } : {}),
    })),
    parts.some(({ mocks }) => mocks !== null),
  );

/** The data that the default prior of a parameter looks at: those of its own measurement, or all where it is shared. */
function dataOfPart(parts: readonly CutPart[]): (declaration: ParameterDeclaration) => DataScale {
  const all = {
    kappa: parts.flatMap(({ points }) => Array.from(points.kappa)),
    S: parts.flatMap(({ points }) => Array.from(points.S)),
  };
  return ({ name, role }) =>
    isFixedColumn(role) && parts.length > 1 ? parts[partOfName(name).part].points : all;
}

/** Refuses priors, or a likelihood, with which no posterior can be built. */
export function checkFittable({ data, likelihood, template, priors }: InferenceSpec): void {
  refusingFaults(() => {
    const { free } = layOutParameters({ template, priors });
    buildMetric(data, likelihood, free.length);
  });
}

type Columns = Pick<StoredNumbers, 'rows' | 'hasBinEdges' | 'points'>;

/**
 * Cuts carried to a version: single bins are found by their edges, and what that version hasn't got is dropped. Without any
 * left out `excluded` is absent, so that the same cuts always read the same.
 */
export function carryCuts(
  version: Columns,
  { excluded = [], ...range }: NotebookSettings['cuts'],
): { cuts: NotebookSettings['cuts']; dropped: ExcludedBin[] } {
  if (excluded.length === 0) return { cuts: range, dropped: [] };
  const carried = carryExcluded(readColumns(version), excluded);
  return {
    cuts: { ...range, ...(carried.excluded.length ? { excluded: carried.excluded } : {}) },
    dropped: carried.dropped,
  };
}

/** The cuts with the place of every bin left out. `invalid` where a bin isn't there or is left out twice. */
function settleCuts(
  version: Columns,
  cuts: NotebookSettings['cuts'],
  path = 'cuts',
): NotebookSettings['cuts'] {
  const { cuts: settled, dropped } = carryCuts(version, cuts);
  if (dropped.length === 0) return settled;
  const [{ bin, kappa }] = dropped;
  const at = (cuts.excluded ?? []).indexOf(dropped[0]);
  const what = kappa
    ? `bin ${bin} with κ from ${kappa[0]} to ${kappa[1]}`
    : bin > version.rows
      ? `bin ${bin}; it has ${version.rows}`
      : `bin ${bin} that isn't left out already`;
  const message = `The measurement has no ${what}. Name each bin once, by its number from 1 to ${version.rows}.`;
  throw new AppError('invalid', message, [{ path: `${path}.excluded.${at}.bin`, message }]);
}

/**
 * The complete settings of sections 1, 2 and 4 that a draft means on versions of its measurements: options with all
 * defaults, a prior for every parameter. `invalid` with place and remedy where they can't be fitted.
 */
export function settleSettings(
  numbers: StoredNumbers,
  draft: SettingsDraft,
  { blind }: { blind: boolean },
): NotebookSettings {
  const cuts = settleCuts(numbers, draft.cuts);
  const also = draft.also?.map((part, k) => ({
    version: part.version,
    cuts: settleCuts(numbers.also?.[k] ?? numbers, part.cuts, `alsoMeasurements.${k}.cuts`),
  }));
  const together = {
    ...(also?.length ? { also } : {}),
    ...(draft.sharedMocks ? { sharedMocks: true as const } : {}),
  };
  const parts = cutParts(numbers, { cuts, ...together });
  const { id, options } = draft.template;
  const parameters = refusingFaults(() =>
    assembledParameters(
      findTemplate(id).parameters(options),
      parts.map(({ points }, k) => ({ label: partLabel(k), columns: points.theory.columns })),
    ),
  );
  const settings: NotebookSettings = {
    cuts,
    likelihood: draft.likelihood ?? { kind: defaultLikelihood(parts) },
    template: { id, version: 0, options },
    priors: settlePriors(parameters, draft, blind ? null : dataOfPart(parts)),
    ...together,
  };
  const { spec } = specOnParts(parts, settings);
  checkFittable(spec);
  return {
    ...settings,
    template: { id, version: spec.template.version, options: spec.template.options },
  };
}

/**
 * Priors by name after measurements were added to a notebook or taken out: those of a measurement's own background and columns go with
 * it, whatever number it has now. `before` and `after` name the measurements in their order.
 */
export function carryPriors(
  priors: NotebookSettings['priors'],
  before: readonly string[],
  after: readonly string[],
): NotebookSettings['priors'] {
  const ending = (list: readonly string[], k: number): string => (list.length > 1 ? `_${k + 1}` : '');
  const own = (name: string): boolean => before.length === 1 || /_\d+$/.test(name);
  const shared = Object.entries(priors).filter(([name]) => before.length === 1 || !own(name));
  const moved = after.flatMap((measurement, k) => {
    const from = before.indexOf(measurement);
    const was = ending(before, from);
    if (from < 0) return [];
    return Object.entries(priors).flatMap(([name, prior]) =>
      own(name) && name.endsWith(was)
        ? [[`${name.slice(0, name.length - was.length)}${ending(after, k)}`, prior] as const]
        : [],
    );
  });
  return Object.fromEntries([...shared, ...moved]);
}

/** The sections in which two revisions differ. */
export function changedSections(
  before: { title: string; settings: NotebookSettings },
  after: { title: string; settings: NotebookSettings },
): NotebookSection[] {
  const differ = (key: keyof NotebookSettings) =>
    !isDeepStrictEqual(before.settings[key], after.settings[key]);
  return [
    ...(before.title !== after.title ? (['title'] as const) : []),
    ...((['cuts', 'likelihood', 'also', 'sharedMocks'] as const).some(differ)
      ? (['measurement'] as const)
      : []),
    ...(differ('template') ? (['template'] as const) : []),
    ...(differ('priors') ? (['priors'] as const) : []),
  ];
}
