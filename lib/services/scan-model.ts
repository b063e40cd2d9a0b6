import { isFixedColumn, layOutParameters } from '@/lib/inference/parameter-layout';
import type { FitData, InferenceSpec } from '@/lib/inference';
import { nullThreshold, reachOf, runScan, type NullHeights, type ScanOutcome } from '@/lib/inference/scan';
import { templateCoordinates } from '@/lib/inference/scan/template-coordinates';
import { fieldCount, findTemplate, type Prior } from '@/lib/templates';
import type { ScanRequest, ScanResult } from '@/lib/schemas';
import type { NotebookSettings } from '@/models';
import { cutParts, specOnParts, uncutData, writeDoubles, type NotebookInference } from './inference-spec';
import type { StoredNumbers } from './fit-model';

/** All that a thread needs to scan. */
export interface ScanJobModel {
  numbers: StoredNumbers;
  request: ScanRequest;
  /** The measurement's own, so that all its scans see the same nulls. */
  seed: string;
}

type Settings = Pick<ScanRequest, 'cuts' | 'likelihood' | 'template' | 'priors' | 'also' | 'sharedMocks'>;

/** The settings with `count` fields: priors of parameters that remain, the template's own for those that appear. */
function withFields(settings: Settings, count: number): NotebookSettings {
  const { id, version, options } = settings.template;
  const fields = Array.isArray(options.fields) ? options.fields.slice(0, count) : count;
  const changed = { ...options, fields };
  const parameters = findTemplate(id).parameters(changed);
  const priors = Object.fromEntries(
    parameters.map(({ name, defaultPrior }): [string, Prior] => [
      name,
      settings.priors[name] ?? defaultPrior,
    ]),
  );
  return {
    cuts: settings.cuts,
    likelihood: settings.likelihood,
    template: { id, version, options: changed },
    // Columns of the measurement are no parameters of the template: their priors stay.
    priors: { ...settings.priors, ...priors },
  };
}

export interface ScanSpecs {
  one: InferenceSpec;
  two: InferenceSpec | null;
  notebook: NotebookInference;
}

/** What is scanned for settings on a measurement: one field, and two where the notebook has more than one. */
export function scanSpecs(numbers: StoredNumbers, settings: Settings): ScanSpecs {
  const parts = cutParts(numbers, settings);
  const one = specOnParts(parts, withFields(settings, 1));
  const two =
    fieldCount(settings.template.options.fields) > 1 ? specOnParts(parts, withFields(settings, 2)) : null;
  return { one: one.spec, two: two?.spec ?? null, notebook: one };
}

/** Refuses with InferenceError what can't be scanned. */
export function checkScannable({ one, two }: ScanSpecs): void {
  for (const spec of [one, two]) if (spec) templateCoordinates(layOutParameters(spec));
}

/** The reach of the columns in ln κ, which settles the grid. */
export const reachOfSpecs = ({ one, notebook }: ScanSpecs): number =>
  reachOf(notebook.axes, one.template.structure === 'mixed');

const orNull = (value: number): number | null => (Number.isFinite(value) ? value : null);
const listed = (values: ArrayLike<number>): number[] => Array.from(values);

export interface FinishedScan {
  result: ScanResult;
  heights: Buffer | null;
  planeHeights: Buffer | null;
}

/** Covariance of the data about a prediction, before cuts: what the theory leaves out scatters too. */
const scatterOf = ({ covariance, theoryCovariance: added }: FitData): Float64Array =>
  added ? covariance.map((value, k) => value + added[k]) : covariance;

/** Runs a scan as it was requested. Reads nothing but its arguments. */
export function performScan(
  { numbers, request, seed }: ScanJobModel,
  onProgress: (fraction: number) => void,
): FinishedScan {
  const specs = scanSpecs(numbers, request);
  const uncut = uncutData(numbers, request);
  const outcome = runScan(
    {
      one: specs.one,
      two: specs.two,
      axes: specs.notebook.axes,
      muMin: request.muMin,
      muMax: request.muMax,
      nulls: request.nulls,
      source: {
        covariance: scatterOf(uncut),
        rows: uncut.S.length,
        kept: specs.notebook.kept,
        mocks: uncut.mockCount,
      },
      seed,
    },
    onProgress,
  );
  return {
    result: present(outcome, specs),
    heights: heightsOf(outcome.nulls),
    planeHeights: heightsOf(outcome.plane?.nulls ?? null),
  };
}

const heightsOf = (nulls: NullHeights | null): Buffer | null => nulls && writeDoubles(nulls.heights);

/** Global p whose heights a scan's figure shows. */
const drawnLevels = [0.05, 0.01];

function thresholdOf({ heights }: NullHeights, p: number): ScanResult['thresholds'] {
  const deltaChi2 = nullThreshold(heights, p);
  return deltaChi2 === null ? [] : [{ p, deltaChi2 }];
}

function present(outcome: ScanOutcome, { one }: ScanSpecs): ScanResult {
  const { line, nulls, plane, facts, window } = outcome;
  return {
    mu: listed(line.mu),
    deltaChi2: listed(line.deltaChi2),
    logEvidence: listed(line.logEvidence).map(orNull),
    backgroundLogEvidence: orNull(outcome.backgroundLogEvidence),
    best: { mu: line.best.mu, deltaChi2: line.best.deltaChi2, parameters: bestParameters(outcome, one) },
    localP: outcome.localP,
    freedom: outcome.freedom,
    globalP: nulls?.globalP ?? null,
    nulls: nulls?.heights.length ?? 0,
    globalPUpcrossing: outcome.globalPUpcrossing,
    thresholds: nulls ? drawnLevels.flatMap((p) => thresholdOf(nulls, p)) : [],
    aliases: outcome.aliases,
    coverage: facts,
    window: { mu: listed(window.mu), power: listed(window.power) },
    plane: plane && {
      mu: listed(plane.mu),
      deltaChi2: listed(plane.deltaChi2).map(orNull),
      logEvidence: plane.logEvidence && listed(plane.logEvidence).map(orNull),
      best: { mu: listed(plane.best.mu), deltaChi2: plane.best.deltaChi2 },
      globalP: plane.nulls?.globalP ?? null,
      nulls: plane.nulls?.heights.length ?? 0,
    },
  };
}

/** The best fit of one field in the template's own parameters, where they can be read off its columns. */
function bestParameters({ line }: ScanOutcome, spec: InferenceSpec): Record<string, number> {
  const { parameters, structure } = spec.template;
  const { raw, coefficients } = line.best.fit;
  const values: Record<string, number> = {};
  const free = parameters.filter(
    ({ name, role }) => isFixedColumn(role) && spec.priors[name].kind !== 'fixed',
  );
  free.forEach(({ name }, k) => (values[name] = coefficients[coefficients.length - free.length + k]));
  for (const { name, role } of parameters) {
    const prior = spec.priors[name];
    if (prior.kind === 'fixed') values[name] = prior.value;
    else if (role === 'mass') values[name] = line.best.mu;
    else if (role === 'quadrature') values[name] = raw[name.startsWith('a') ? 0 : 1];
    else if (role === 'phase') values[name] = Math.atan2(-raw[1], raw[0]);
    else if (role === 'amplitude') values[name] = Math.hypot(raw[0], raw[1]);
    else if (role === 'coupling' && structure === 'mixed' && coefficients.length === free.length + 1) {
      values[name] = coefficients[0];
    }
  }
  return values;
}
