import { isDeepStrictEqual } from 'node:util';
import type { MeasurementVersion, NotebookSettings } from '@/models';
import { AppError } from '@/lib/errors';
import { buildLikelihood, type InferenceSpec } from '@/lib/inference';
import { layOutParameters } from '@/lib/inference/parameter-layout';
import type { CreateNotebook, NotebookSection } from '@/lib/schemas';
import { findTemplate, type ParameterDeclaration, type Prior } from '@/lib/templates';
import { defaultPrior, type DataScale } from './default-priors';
import { refusingFaults } from './inference-faults';
import { cutPoints, specOnPoints } from './inference-spec';

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

type Version = Pick<MeasurementVersion, 'rows' | 'hasBinEdges' | 'points' | 'covariance' | 'mockCount'>;

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

/** Refuses priors, or a likelihood, with which no posterior can be built. */
export function checkFittable({ data, likelihood, template, priors }: InferenceSpec): void {
  refusingFaults(() => {
    const { free } = layOutParameters({ template, priors });
    // The determinant shifts the density only; that C is positive definite was settled at upload, and a cut keeps it.
    buildLikelihood(likelihood, data.mockCount, data.S.length, free.length, 0);
  });
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
  const points = cutPoints(version, draft.cuts);
  const { id, options } = draft.template;
  const parameters = refusingFaults(() => findTemplate(id).parameters(options));
  const settings: NotebookSettings = {
    cuts: draft.cuts,
    likelihood: draft.likelihood ?? { kind: version.mockCount === null ? 'normal' : 'matched-t' },
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
