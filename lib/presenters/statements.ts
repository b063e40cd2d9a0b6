import { decimalsByMcse, formatCount, formatInterval, formatNumber, thinSpace } from '@/lib/figures/format';
import { quantileMcse, weakness, type ReportedTail } from '@/lib/figures/mcse';
import {
  endedStatuses,
  type Diagnostic,
  type ExcludedBin,
  type Fit,
  type FitStatus,
  type StatementPiece,
} from '@/lib/schemas';
import { factWords, statisticWords, writeReference, type Reference } from '@/lib/statement/reference';
import { assembledParameters } from '@/lib/inference/assembled-template';
import { findTemplate } from '@/lib/templates';

/** What a statement may say of a fit. */
export interface ReferredFit {
  id: string;
  number: number;
  revision: number;
  /** Settings of the notebook changed since. */
  outdated: boolean;
  status: FitStatus;
  blind: boolean;
  replicas: number;
  /** Kept draws a replica. */
  kept: number;
  diagnostics: readonly Diagnostic[];
  gate: Fit['gate'];
  template: { id: string; options: Record<string, unknown> };
  priors: Fit['snapshot']['priors'];
  /** Its measurements, the notebook's own first. */
  measurements: readonly { name: string; version: number }[];
  /** Bins that its cuts keep, of all measurements. */
  bins: number;
  /** Single bins that they leave out. */
  excluded: readonly ExcludedBin[];
  sha256: string;
}

interface Quantity {
  name: string;
  label: string;
}

/** Everything that a fit has a number for: its template's parameters and what is derived from them. */
export function quantitiesOfFit({
  template,
  priors,
  measurements,
}: Pick<ReferredFit, 'template' | 'priors' | 'measurements'>): Quantity[] {
  const declaration = findTemplate(template.id);
  const declared = [
    ...assembledParameters(
      declaration.parameters(template.options),
      measurements.map(({ name }) => ({ label: name })),
    ),
    ...declaration.derived(template.options),
  ].map(({ name, label }) => ({ name, label }));
  // The columns of a measurement have priors like any parameter; their names are the group's own words.
  const own = Object.keys(priors).filter((name) => !declared.some((each) => each.name === name));
  return [...declared, ...own.map((name) => ({ name, label: `column ${name}` }))];
}

const listed = (words: readonly string[]): string =>
  words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} and ${words[words.length - 1]}`;

/** Why a reference names nothing, with what to write instead; null where it names something. */
export function faultOf(reference: Reference, fits: ReadonlyMap<number, ReferredFit>): string | null {
  const fit = fits.get(reference.fit);
  if (!fit) {
    const numbers = [...fits.keys()].sort((a, b) => a - b).map(String);
    const there =
      numbers.length === 0
        ? 'The notebook has no fit yet: start one first.'
        : `It has ${numbers.length === 1 ? 'fit' : 'fits'} ${listed(numbers)}.`;
    return `There is no fit ${reference.fit} in this notebook. ${there}`;
  }
  if (reference.kind === 'fact') return null;
  const names = quantitiesOfFit(fit).map(({ name }) => name);
  if (names.includes(reference.quantity)) return null;
  return `Fit ${fit.number} has no quantity ${reference.quantity}; it has ${listed(names)}.`;
}

const running: Readonly<Partial<Record<FitStatus, string>>> = {
  queued: 'waits for a worker',
  'warming-up': 'is warming up',
  sampling: 'is still sampling',
};

type Value = { value: string } | { because: string };

/** Digits as in the table of marginals: none finer than twice its Monte Carlo error, and at most four. */
const decimalsOf = (mcse: number): number => Math.min(4, decimalsByMcse(mcse));

function marginalValue(
  reference: Extract<Reference, { kind: 'marginal' }>,
  { diagnostics, priors, number: fit }: ReferredFit,
): Value {
  const prior = priors[reference.quantity];
  if (prior?.kind === 'fixed') return { value: `${prior.value} (fixed)`.replace('-', '−') };
  const found = diagnostics.find(({ parameter }) => parameter === reference.quantity);
  if (!found) return { because: `fit ${fit} has kept no draw` };
  const { mean, sd, q2_5, q16, q50, q84, q97_5, rhat, essBulk, essTail, mcseMean, mcseSd } = found;
  const number = (value: number | null, decimals: number) => formatNumber(value ?? NaN, decimals);
  if (reference.statistic === 'R-hat') {
    return rhat === null ? { because: 'R-hat isn’t known' } : { value: number(rhat, 3) };
  }
  if (reference.statistic === 'ESS') {
    if (essBulk === null || essTail === null) return { because: 'the effective sample size isn’t known' };
    return { value: formatCount(Math.round(Math.min(essBulk, essTail))) };
  }
  const weak = weakness(found);
  if (weak !== null) return { because: weak };
  const digits = (tail: ReportedTail) => decimalsOf(quantileMcse(tail, found));
  const interval = (lo: number | null, hi: number | null, tail: ReportedTail) =>
    formatInterval(lo ?? NaN, hi ?? NaN, digits(tail));
  switch (reference.statistic) {
    case 'summary':
      return { value: `${number(q50, digits(0.5))} (68${thinSpace}%: ${interval(q16, q84, 0.16)})` };
    case 'median':
      return { value: number(q50, digits(0.5)) };
    case 'mean': {
      const both = Math.min(decimalsOf(mcseMean ?? NaN), decimalsOf(mcseSd ?? NaN));
      return { value: `${number(mean, both)} ± ${number(sd, both)}` };
    }
    case '68 %':
      return { value: interval(q16, q84, 0.16) };
    case '95 %':
      return { value: interval(q2_5, q97_5, 0.025) };
    case '97.5 %':
      return { value: number(q97_5, digits(0.025)) };
  }
}

function templateName({ template: { id, options } }: ReferredFit): string {
  const { title } = findTemplate(id);
  const fields = typeof options.fields === 'number' ? options.fields : 0;
  const plain = title.charAt(0).toLowerCase() + title.slice(1);
  return fields === 0 ? plain : `${plain}, ${fields} ${fields === 1 ? 'field' : 'fields'}`;
}

/** "bins 7 (beam not modelled) and 9 (one mock field missing)" */
function leftOutValue({ excluded }: ReferredFit): string {
  if (excluded.length === 0) return 'no bin';
  const each = excluded.map(({ bin, reason }) => `${bin} (${reason})`);
  return `${excluded.length === 1 ? 'bin' : 'bins'} ${listed(each)}`;
}

function gateValue({ gate, diagnostics }: ReferredFit): Value {
  const { rhat, ess } = gate.target;
  const wanted = `R-hat below ${rhat} and effective sample size above ${formatCount(ess)}`;
  const count = `${formatCount(diagnostics.length)} quantities`;
  return { value: gate.met ? `met: ${wanted} in all ${count}` : `not met: not all ${count} have ${wanted}` };
}

function valueOf(reference: Reference, fit: ReferredFit): Value {
  if (reference.kind === 'fact') {
    if (reference.fact === 'measurement') {
      return { value: listed(fit.measurements.map(({ name, version }) => `${name}, version ${version}`)) };
    }
    if (reference.fact === 'template') return { value: templateName(fit) };
    if (reference.fact === 'bins') return { value: formatCount(fit.bins) };
    if (reference.fact === 'left out') return { value: leftOutValue(fit) };
    if (reference.fact === 'replicas') return { value: formatCount(fit.replicas) };
    if (reference.fact === 'snapshot')
      return { value: `${fit.sha256.slice(0, 4)} ${fit.sha256.slice(4, 8)}` };
  }
  const going = running[fit.status];
  if (going) return { because: `fit ${fit.number} ${going}` };
  if (reference.kind === 'fact' && reference.fact === 'draws')
    return { value: formatCount(fit.replicas * fit.kept) };
  if (fit.blind) return { because: 'the measurement is blind' };
  return reference.kind === 'fact' ? gateValue(fit) : marginalValue(reference, fit);
}

function labelOf(reference: Reference, fit: ReferredFit | undefined): string {
  if (reference.kind === 'fact') return factWords[reference.fact];
  const quantity = fit && quantitiesOfFit(fit).find(({ name }) => name === reference.quantity);
  return `${statisticWords[reference.statistic]}, ${quantity?.label ?? reference.quantity}`;
}

/** A reference as it is read: the number with the digits that its draws allow, or why there is none, and what limits it. */
export function presentReference(
  reference: Reference,
  fits: ReadonlyMap<number, ReferredFit>,
): Extract<StatementPiece, { kind: 'value' }> {
  const fit = fits.get(reference.fit);
  const fault = faultOf(reference, fits);
  const said: Value = !fit || fault !== null ? { because: fault ?? '' } : valueOf(reference, fit);
  const ended = fit !== undefined && endedStatuses.includes(fit.status);
  // Template, bins and the like are so whether the draws are any good or not.
  const ofDraws = reference.kind === 'marginal' || reference.fact === 'gate' || reference.fact === 'draws';
  return {
    kind: 'value',
    reference: writeReference(reference),
    label: labelOf(reference, fit),
    value: 'value' in said ? said.value : null,
    because: 'because' in said ? said.because : null,
    fit: { id: fit?.id ?? null, number: reference.fit, revision: fit?.revision ?? null },
    marks: [
      ...(fit?.outdated ? (['earlier-revision'] as const) : []),
      ...(ended && ofDraws && fit.status !== 'converged' ? (['not-converged'] as const) : []),
    ],
  };
}
