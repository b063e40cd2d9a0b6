import { Op, type Transaction } from 'sequelize';
import { Fit, FitPart, NotebookRevision } from '@/models';
import { AppError } from '@/lib/errors';
import { faultOf, presentReference, type ReferredFit } from '@/lib/presenters/statements';
import {
  settingSections,
  fitStatusSchema,
  snapshotSchema,
  type Statement,
  type TypesetStatement,
} from '@/lib/schemas';
import { emptyReport, storedReportSchema } from '@/lib/schemas/stored-report';
import { parseStatement, referencesOf, type StatementFault } from '@/lib/statement/parse-statement';
import type { Access } from './access';
import { countKept } from './inference-spec';
import { findNotebook, recordOf } from './notebook-records';
import { emailsOf } from './people';
import { versionLines } from './version-lines';

/** Which sections each revision changed. */
const changesOf = (
  notebookId: string,
  transaction?: Transaction,
): Promise<Pick<NotebookRevision, 'revision' | 'sections'>[]> =>
  transaction
    ? NotebookRevision.findAll({
        where: { notebookId },
        attributes: ['revision', 'sections'],
        transaction,
      })
    : recordOf(notebookId);

/**
 * The fits of a notebook as a text may speak of them, by number. Those that it speaks of; all of them where it speaks of one that
 * isn't there, so that it can be told which are.
 */
async function referredFits(
  notebookId: string,
  text: string,
  transaction?: Transaction,
): Promise<Map<number, ReferredFit>> {
  const numbers = [...new Set(referencesOf(parseStatement(text)).map(({ reference }) => reference.fit))];
  if (numbers.length === 0) return new Map();
  const named = await Fit.findAll({ where: { notebookId, number: numbers }, transaction });
  const fits =
    named.length === numbers.length ? named : await Fit.findAll({ where: { notebookId }, transaction });
  if (fits.length === 0) return new Map();
  const parts = await FitPart.findAll({
    where: { fitId: fits.map(({ id }) => id) },
    order: [['place', 'ASC']],
    transaction,
  });
  const [versions, changes] = await Promise.all([
    versionLines(
      [...fits, ...parts].map(({ measurementVersionId }) => measurementVersionId),
      transaction,
    ),
    changesOf(notebookId, transaction),
  ]);
  const settled = changes.filter(
    ({ revision, sections }) => revision > 1 && settingSections.some((section) => sections.includes(section)),
  );
  return new Map(
    fits.flatMap((fit) => {
      const version = versions.get(fit.measurementVersionId);
      if (!version) return [];
      const snapshot = snapshotSchema.parse(fit.snapshot);
      const further = parts
        .filter(({ fitId }) => fitId === fit.id)
        .flatMap(({ measurementVersionId }) => versions.get(measurementVersionId) ?? []);
      const report =
        fit.report === null || version.blind ? emptyReport : storedReportSchema.parse(fit.report);
      const referred: ReferredFit = {
        id: fit.id,
        number: fit.number,
        revision: fit.revision,
        outdated: settled.some(({ revision }) => revision > fit.revision),
        status: fitStatusSchema.parse(fit.status),
        blind: version.blind,
        replicas: snapshot.replicas,
        kept: Math.max(0, fit.draws - snapshot.warmup),
        diagnostics: report.diagnostics,
        gate: { ...report.gate, target: { rhat: fit.targetRhat, ess: fit.targetEss } },
        template: snapshot.template,
        priors: snapshot.priors,
        measurements: [version, ...further].map(({ name, version: number }) => ({ name, version: number })),
        bins: further.reduce(
          (sum, each, k) => sum + countKept(each, snapshot.also?.[k].cuts ?? {}),
          countKept(version, snapshot.cuts),
        ),
        excluded: snapshot.cuts.excluded ?? [],
        sha256: fit.snapshotSha256,
      };
      return [[fit.number, referred] as const];
    }),
  );
}

function typeset(text: string, fits: ReadonlyMap<number, ReferredFit>): TypesetStatement {
  const parsed = parseStatement(text);
  const references = referencesOf(parsed);
  const unknown = references.flatMap(({ reference, line, column }): StatementFault[] => {
    const message = faultOf(reference, fits);
    return message === null ? [] : [{ line, column, message }];
  });
  const numbers = [...new Set(references.map(({ reference }) => reference.fit))].sort((a, b) => a - b);
  return {
    paragraphs: parsed.paragraphs.map((pieces) =>
      pieces.map((piece) => (piece.kind === 'text' ? piece : presentReference(piece.reference, fits))),
    ),
    faults: [...parsed.faults, ...unknown].sort((a, b) => a.line - b.line || a.column - b.column),
    fits: numbers.flatMap((number) => {
      const fit = fits.get(number);
      return fit ? [{ id: fit.id, number, revision: fit.revision, sha256: fit.sha256 }] : [];
    }),
  };
}

/** Words that refer to nothing are refused as a whole, each fault with its place and remedy. */
export async function checkStatement(
  notebookId: string,
  text: string,
  transaction: Transaction,
): Promise<void> {
  const { faults } = typeset(text, await referredFits(notebookId, text, transaction));
  if (faults.length === 0) return;
  const [{ line, column, message }] = faults;
  const more = faults.length > 1 ? ` And ${faults.length - 1} more.` : '';
  throw new AppError(
    'invalid',
    `The statement can’t be stored. Line ${line}, character ${column}: ${message}${more}`,
    faults.map((fault) => ({ path: 'statement', ...fault })),
  );
}

/** The words that stand at a revision: they are stored with the revision that changed them. */
export async function statementAt(
  notebookId: string,
  revision: number,
  transaction?: Transaction,
): Promise<string> {
  const last = await NotebookRevision.findOne({
    where: { notebookId, revision: { [Op.lte]: revision }, statement: { [Op.ne]: null } },
    attributes: ['statement'],
    order: [['revision', 'DESC']],
    transaction,
  });
  return last?.statement ?? '';
}

/** The statement of the notebook of `access`, as it stands or as it stood at a revision, with the numbers of now. */
export async function readStatement(access: Access, at?: number): Promise<Statement> {
  access.require('notebook.read');
  const notebook = await findNotebook(access);
  const revision = at ?? notebook.revision;
  if (revision > notebook.revision) {
    const message = `Revision ${revision} isn’t there yet; revision ${notebook.revision} stands.`;
    throw new AppError('invalid', message, [{ path: 'revision', message }]);
  }
  const changes = (await recordOf(notebook.id)).filter(({ statement }) => statement !== null).reverse();
  const text = changes.find((change) => change.revision <= revision)?.statement ?? '';
  const fits = await referredFits(notebook.id, text);
  const people = await emailsOf(changes.map(({ createdBy }) => createdBy));
  const history = changes.map((change) => ({
    revision: change.revision,
    by: people.get(change.createdBy) ?? 'a former member',
    at: change.createdAt.toISOString(),
  }));
  return {
    text,
    written: history.find((change) => change.revision <= revision) ?? null,
    history,
    ...typeset(text, fits),
  };
}

/** Words typeset with the numbers of now and nothing stored: what a person sees while they write. */
export async function typesetStatement(
  access: Access,
  { text }: { text: string },
): Promise<TypesetStatement> {
  access.require('notebook.edit');
  return typeset(text, await referredFits(access.id, text));
}
