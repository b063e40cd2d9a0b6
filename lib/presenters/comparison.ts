import type { Fit } from '@/models';
import { comparingKind } from '@/lib/inference/scan';
import {
  endedStatuses,
  fitStatusSchema,
  type ComparedFit,
  type Comparison,
  type Snapshot,
} from '@/lib/schemas';
import { emptyReport, storedReportSchema, type StoredReport } from '@/lib/schemas/stored-report';
import { fieldCount } from '@/lib/templates';
import { marginalOf } from './shifts';

type FitRow = Pick<
  Fit,
  'id' | 'number' | 'revision' | 'status' | 'draws' | 'maxDraws' | 'report' | 'snapshot'
>;

/** A fit with what it froze, parsed. */
export interface FrozenFit {
  fit: FitRow;
  snapshot: Snapshot;
}

type LogEvidence = NonNullable<ComparedFit['logEvidence']>;

/** What two fits must share for the ratio of their evidences to be a Bayes factor. */
export interface Question {
  inputs: Snapshot['inputs'];
  measurementVersion: number;
  cuts: Snapshot['cuts'];
  /** What the file's bispectrum was turned into S by. */
  spectrum?: Snapshot['spectrum'];
  mockCount: number | null;
  /** Further measurements, and whether all share their mocks. */
  also?: Snapshot['also'];
  sharedMocks?: boolean;
  kind: string;
}

/** The likelihood that evidences are of stands in the place of the one that was sampled. */
export const questionOf = (snapshot: Omit<Question, 'kind'> & Pick<Snapshot, 'likelihood'>): Question => ({
  inputs: snapshot.inputs,
  measurementVersion: snapshot.measurementVersion,
  cuts: snapshot.cuts,
  spectrum: snapshot.spectrum,
  mockCount: snapshot.mockCount,
  also: snapshot.also,
  sharedMocks: snapshot.sharedMocks,
  kind: comparingKind(snapshot.likelihood.kind),
});

/** What of the cuts settles which bins are kept: the words beside a bin that is left out don't. */
const binsOf = ({ kappaMin, kappaMax, excluded = [] }: Question['cuts']) => [
  kappaMin ?? null,
  kappaMax ?? null,
  excluded.map(({ bin }) => bin),
];

/** What of the further measurements settles the question. */
const furtherOf = ({ also = [], sharedMocks = false }: Question) => [
  sharedMocks,
  also.map(({ inputs, cuts, spectrum, mockCount }) => [
    inputs.map(({ part, sha256 }) => [part, sha256]),
    binsOf(cuts),
    spectrum ?? null,
    mockCount,
  ]),
];

const keyOf = (question: Question): string =>
  JSON.stringify([
    question.inputs.map(({ part, sha256 }) => [part, sha256]),
    binsOf(question.cuts),
    question.spectrum ?? null,
    question.mockCount,
    question.kind,
    furtherOf(question),
  ]);

/** Why a set can't be compared with the notebook as it stands: "it rests on version 1 of the measurement and has other cuts" */
function difference(set: Question, standing: Question): string {
  const same = (a: unknown, b: unknown) => JSON.stringify(a) === JSON.stringify(b);
  const reasons = [
    ...(set.measurementVersion !== standing.measurementVersion
      ? [`it rests on version ${set.measurementVersion} of the measurement`]
      : same(set.inputs, standing.inputs) &&
          same(set.spectrum, standing.spectrum) &&
          set.mockCount === standing.mockCount
        ? []
        : ['it rests on other files']),
    ...(same(binsOf(set.cuts), binsOf(standing.cuts)) ? [] : ['it keeps other bins']),
    ...(same(furtherOf(set), furtherOf(standing)) ? [] : ['its further measurements are others']),
    ...(set.kind === standing.kind ? [] : ['its likelihood is another']),
  ];
  return reasons.join(' and ');
}

/**
 * ln of the ratio of two evidences: errors add in quadrature, degrees of freedom by Welch and Satterthwaite,
 * ν = (Σ s²)² / Σ (s⁴/ν). One and the same evidence has no error against itself.
 */
export function logRatio(one: LogEvidence | null, other: LogEvidence | null): LogEvidence | null {
  if (!one || !other) return null;
  if (one.value === other.value && one.error === other.error) return { value: 0, error: 0, dof: one.dof };
  const [a, b] = [one.error ** 2, other.error ** 2];
  const dof =
    a + b > 0 ? (a + b) ** 2 / (a ** 2 / one.dof + b ** 2 / other.dof) : Math.min(one.dof, other.dof);
  return { value: one.value - other.value, error: Math.sqrt(a + b), dof };
}

const reportOf = ({ fit }: FrozenFit): StoredReport =>
  fit.report === null ? emptyReport : storedReportSchema.parse(fit.report);

/** Errors at or below rounding: nothing was sampled for it. */
const exactError = 1e-7;

/** An evidence that still moves isn't compared: the fit has to have ended. */
function settledEvidence(frozen: FrozenFit): LogEvidence | null {
  const report = reportOf(frozen);
  const { logEvidence } = report;
  const ended = endedStatuses.includes(fitStatusSchema.parse(frozen.fit.status));
  return logEvidence && (ended || logEvidence.error <= exactError) ? logEvidence : null;
}

/** Bayes factors of fits of one set: against the highest evidence among them, and against the last fit without fields. */
function factorsOf(fits: readonly FrozenFit[]) {
  const found = fits.flatMap((each) => {
    const evidence = settledEvidence(each);
    return evidence ? [{ evidence, fields: fieldCount(each.snapshot.template.options.fields) }] : [];
  });
  const best = found.reduce<LogEvidence | null>(
    (top, { evidence }) => (top && top.value >= evidence.value ? top : evidence),
    null,
  );
  const none = found.findLast(({ fields }) => fields === 0)?.evidence ?? null;
  return (evidence: LogEvidence | null) => ({
    lnBayesBest: logRatio(evidence, best),
    lnBayesNone: logRatio(evidence, none),
  });
}

function presentCompared(frozen: FrozenFit, factors: ReturnType<typeof factorsOf>): ComparedFit {
  const { fit, snapshot } = frozen;
  const report = reportOf(frozen);
  const status = fitStatusSchema.parse(fit.status);
  const ended = endedStatuses.includes(status);
  const logEvidence = settledEvidence(frozen);
  const kept = Math.max(0, fit.draws - snapshot.warmup);
  return {
    id: fit.id,
    number: fit.number,
    revision: fit.revision,
    status,
    template: snapshot.template,
    fields: fieldCount(snapshot.template.options.fields),
    measurementVersion: snapshot.measurementVersion,
    cuts: snapshot.cuts,
    likelihood: snapshot.likelihood,
    progress: ended
      ? 1
      : Math.min(1, kept / Math.max(1, Math.min(fit.maxDraws, report.wanted ?? fit.maxDraws))),
    gate: report.gate,
    logEvidence,
    noEvidence: logEvidence ? null : ended ? report.noEvidence : 'the fit hasn’t ended yet',
    exact: logEvidence !== null && logEvidence.error <= exactError,
    ...factors(logEvidence),
    marginals: ended
      ? report.diagnostics.flatMap((each) => {
          const marginal = marginalOf(each);
          return marginal ? [{ parameter: each.parameter, derived: each.derived, ...marginal }] : [];
        })
      : [],
  };
}

/** The notebook's settings with one number of fields, and its last fit of those; or why they can't be fitted. */
export interface CountedFit {
  fields: number;
  fit: FrozenFit | null;
  because: string | null;
}

export interface ComparisonParts {
  /** In rising order of their numbers. */
  fits: readonly FrozenFit[];
  standing: Question;
  counts: readonly CountedFit[];
  noFamily: string | null;
}

export function presentComparison({ fits, standing, counts, noFamily }: ComparisonParts): Comparison {
  const groups = new Map<string, { question: Question; fits: FrozenFit[] }>();
  const own = keyOf(standing);
  for (const each of fits) {
    const question = questionOf(each.snapshot);
    const group = groups.get(keyOf(question)) ?? { question, fits: [] };
    group.fits.push(each);
    groups.set(keyOf(question), group);
  }
  const keys = [...groups.keys()].sort((a, b) => Number(b === own) - Number(a === own));
  const counted = factorsOf(counts.flatMap(({ fit }) => fit ?? []));
  return {
    sets: keys.flatMap((key) => {
      const group = groups.get(key);
      if (!group) return [];
      const factors = factorsOf(group.fits);
      return [
        {
          standing: key === own,
          apart: key === own ? null : difference(group.question, standing),
          evidenceKind: group.question.kind,
          fits: group.fits.map((each) => presentCompared(each, factors)),
        },
      ];
    }),
    counts: counts.map(({ fields, fit, because }) => ({
      fields,
      fit: fit?.fit.id ?? null,
      because,
      ...counted(fit && settledEvidence(fit)),
    })),
    noFamily,
    widths: counts.flatMap(({ fields, fit }) => {
      const curve = fit && reportOf(fit).widths;
      const logEvidence = fit && settledEvidence(fit);
      return fit && curve && logEvidence
        ? [{ fit: fit.fit.id, number: fit.fit.number, fields, logEvidence, curve }]
        : [];
    }),
  };
}

/** While the measurement is blind nothing that was fitted is compared. */
export const blindComparison = (noFamily: string | null): Comparison => ({
  sets: [],
  counts: [],
  noFamily,
  widths: [],
});
