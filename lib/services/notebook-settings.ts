import { isDeepStrictEqual } from 'node:util';
import type { MeasurementVersion, NotebookSettings } from '@/models';
import { AppError } from '@/lib/errors';
import { assembledParameters, buildMetric, likelihoodFor, type InferenceSpec } from '@/lib/inference';
import { layOutParameters } from '@/lib/inference/parameter-layout';
import { carryExcluded, type ExcludedBin, type TheoryParts } from '@/lib/measurements';
import type { CreateNotebook, NotebookSection } from '@/lib/schemas';
import { findTemplate, type ParameterDeclaration, type Prior } from '@/lib/templates';
import { defaultPrior, type DataScale } from './default-priors';
import { refusingFaults } from './inference-faults';
import { cutPoints, readColumns, specOnPoints } from './inference-spec';

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
}

type Version = Pick<
  MeasurementVersion,
  'rows' | 'hasBinEdges' | 'points' | 'covariance' | 'mockCount' | 'theory'
>;

function settlePriors(
  parameters: readonly ParameterDeclaration[],
  { given, kept }: Pick<SettingsDraft, 'given' | 'kept'>,
  data: DataScale | null,
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
        own(given, name) ?? own(kept, name) ?? defaultPrior(declaration, data);
      return [name, { ...prior }];
    }),
  );
}

const defaultLikelihood = (mockCount: number | null, { covariance }: TheoryParts) =>
  likelihoodFor([{ data: { mockCount }, ...(covariance ? { theoryCovariance: covariance } : {}) }], false);

/** Refuses priors, or a likelihood, with which no posterior can be built. */
export function checkFittable({ data, likelihood, template, priors }: InferenceSpec): void {
  refusingFaults(() => {
    const { free } = layOutParameters({ template, priors });
    buildMetric(data, likelihood, free.length);
  });
}

type Columns = Pick<MeasurementVersion, 'rows' | 'hasBinEdges' | 'points'>;

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
function settleCuts(version: Columns, cuts: NotebookSettings['cuts']): NotebookSettings['cuts'] {
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
  throw new AppError('invalid', message, [{ path: `cuts.excluded.${at}.bin`, message }]);
}

/**
 * The complete settings of sections 1, 2 and 4 that a draft means on a measurement's version: options with all
 * defaults, a prior for every parameter. `invalid` with place and remedy where they can't be fitted.
 */
export function settleSettings(
  version: Version,
  draft: SettingsDraft,
  measurement: { blind: boolean },
): NotebookSettings {
  const cuts = settleCuts(version, draft.cuts);
  const points = cutPoints(version, cuts);
  const { id, options } = draft.template;
  const parameters = refusingFaults(() =>
    assembledParameters(findTemplate(id).parameters(options), [
      { label: 'measurement', columns: points.theory.columns },
    ]),
  );
  const settings: NotebookSettings = {
    cuts,
    likelihood: draft.likelihood ?? { kind: defaultLikelihood(version.mockCount, points.theory) },
    template: { id, version: 0, options },
    priors: settlePriors(parameters, draft, measurement.blind ? null : points),
  };
  const { spec } = specOnPoints(points, version.mockCount, settings);
  checkFittable(spec);
  return {
    ...settings,
    template: { id, version: spec.template.version, options: spec.template.options },
  };
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
    ...(differ('cuts') || differ('likelihood') ? (['measurement'] as const) : []),
    ...(differ('template') ? (['template'] as const) : []),
    ...(differ('priors') ? (['priors'] as const) : []),
  ];
}
