import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { Fit, Measurement, NotebookRevision } from '@/models';
import { POST as create } from '@/app/api/v1/groups/[id]/notebooks/route';
import { POST as start } from '@/app/api/v1/notebooks/[id]/fits/route';
import { PATCH } from '@/app/api/v1/notebooks/[id]/route';
import { GET as readStatement } from '@/app/api/v1/notebooks/[id]/statement/route';
import { POST as typeset } from '@/app/api/v1/notebooks/[id]/statement/typeset/route';
import { database } from '@/lib/db';
import {
  createdSchema,
  notebookCreatedSchema,
  notebookSchema,
  statementSchema,
  typesetStatementSchema,
  type StatementPiece,
} from '@/lib/schemas';
import { emptyReport } from '@/lib/schemas/stored-report';
import { diagnosticFixture } from '../components/fixtures';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { uploadData } from './uploads';

beforeAll(() => void database());
afterAll(closeConnections);

let group: string;
let analyst: Awaited<ReturnType<typeof createMember>>;
let notebook: string;
let fit: string;
beforeEach(async () => {
  group = await createGroup();
  analyst = await createMember(group, 'analyst');
  const measurement = (await uploadData(group, analyst.token, 'one-field.csv')).id;
  const template = { id: 'free-phase', options: { fields: 1, amplitudes: 'amplitude-phase' } };
  const json = { title: 'One field', measurement, template };
  const opened = await call(create, { params: { id: group }, token: analyst.token, json });
  notebook = notebookCreatedSchema.parse(await opened.json()).id;
  const begun = await call(start, { params: { id: notebook }, token: analyst.token, json: { seed: 1 } });
  fit = createdSchema.parse(await begun.json()).id;
});

// Tests share one queue: a fit that is left waiting would stand before those of others.
afterEach(() => Fit.update({ status: 'stopped' }, { where: { groupId: group } }));

/** What a worker leaves behind: 400 kept draws a replica with one diagnostic worth reading. */
const end = (status: string) =>
  Fit.update(
    {
      status,
      draws: 1_900,
      report: {
        ...emptyReport,
        draws: 1_900,
        diagnostics: [
          // 2 √(π/2) 0.006 = 0.015, and 0.021 at the ends: one digit after the point is what the draws allow.
          diagnosticFixture('mu1', { q16: 3.41, q50: 3.62, q84: 3.83, mcseMean: 0.006 }),
          diagnosticFixture('A1', { mean: null, sd: null }),
        ],
        gate: { met: status === 'converged', reasons: [] },
      },
    },
    { where: { id: fit } },
  );

const patch = (json: Record<string, unknown>, token = analyst.token) =>
  call(PATCH, { method: 'PATCH', params: { id: notebook }, token, json });
const save = async (statement: string, revision: number) => {
  const answer = await patch({ revision, statement });
  if (answer.status !== 200) throw new Error(await answer.text());
  return notebookSchema.parse(await answer.json());
};
const read = async (query = '', token = analyst.token) =>
  statementSchema.parse(
    await (await call(readStatement, { params: { id: notebook }, token, path: `/${query}` })).json(),
  );
const values = (paragraphs: StatementPiece[][]) =>
  paragraphs.flat().flatMap((piece) => (piece.kind === 'value' ? [piece] : []));

describe('a statement', () => {
  it('is stored with the revision that changed it, and stands until another does', async () => {
    expect(await read()).toMatchObject({ text: '', written: null, history: [], paragraphs: [] });
    const first = await save('Nothing yet.', 1);
    expect([first.statement, first.revision]).toEqual(['Nothing yet.', 2]);
    expect(first.record.at(-1)?.sections).toEqual(['statement']);
    const titled = await patch({ revision: 2, title: 'Another title' });
    expect(notebookSchema.parse(await titled.json())).toMatchObject({
      revision: 3,
      statement: 'Nothing yet.',
    });
    await save('Something.', 3);
    const now = await read();
    expect(now).toMatchObject({ text: 'Something.', written: { revision: 4, by: analyst.user.email } });
    expect(now.history.map(({ revision }) => revision)).toEqual([4, 2]);
    expect(await read('?revision=3')).toMatchObject({ text: 'Nothing yet.', written: { revision: 2 } });
    expect((await save('Something.', 4)).revision).toBe(4);
    const rows = await NotebookRevision.count({ where: { notebookId: notebook } });
    expect(rows).toBe(4);
  });

  it('of a revision that another person has saved over is refused, and nothing is lost', async () => {
    await save('Theirs.', 1);
    const refused = await errorOf(await patch({ revision: 1, statement: 'Mine.' }));
    expect([refused.status, refused.code]).toEqual([409, 'stale_revision']);
    expect((await read()).text).toBe('Theirs.');
  });

  it('makes no fit old, while a new prior does', async () => {
    await end('converged');
    const words = 'μ = {mu1 of fit 1}.';
    await save(words, 1);
    const [value] = values((await read()).paragraphs);
    expect(value).toMatchObject({
      value: '3.6 (68\u202f%: 3.4 to 3.8)',
      marks: [],
      fit: { id: fit, revision: 1 },
    });
    await patch({ revision: 2, priors: { mu1: { kind: 'uniform', lo: 1, hi: 6 } } });
    expect(values((await read()).paragraphs)[0].marks).toEqual(['earlier-revision']);
  });

  it('gives no value of a fit that runs, and says of one that ended short of its gate that it did', async () => {
    await save(
      'μ = {median mu1 of fit 1}, {gate of fit 1}, {bins of fit 1} bins of {measurement of fit 1}.',
      1,
    );
    const [running, , bins, name] = values((await read()).paragraphs);
    expect(running).toMatchObject({ value: null, because: 'fit 1 waits for a worker', marks: [] });
    expect([bins.value, name.value]).toEqual(['36', 'one-field, version 1']);
    await end('budget-spent');
    const [spent, gate] = values((await read()).paragraphs);
    expect(spent).toMatchObject({ value: '3.6', marks: ['not-converged'] });
    expect(gate.value).toContain('not met');
  });

  it('says where statistics are too weak for a number, and what was fixed', async () => {
    await patch({ revision: 1, priors: { c1: { kind: 'fixed', value: -2 } } });
    await call(start, { params: { id: notebook }, token: analyst.token, json: { seed: 2 } });
    await Fit.update({ status: 'stopped' }, { where: { notebookId: notebook, number: 2 } });
    await end('converged');
    await save('{mean A1 of fit 1} {c1 of fit 2} {mu1 of fit 2} {draws of fit 1}', 2);
    const all = values((await read()).paragraphs);
    expect(all.map(({ value, because }) => value ?? because)).toEqual([
      'too few draws are kept',
      '−2 (fixed)',
      'fit 2 has kept no draw',
      '1\u202f600',
    ]);
  });

  it('with a reference to nothing is refused with its place and the remedy, and nothing is stored', async () => {
    const refused = await errorOf(
      await patch({ revision: 1, statement: 'Fine.\nμ = {mu7 of fit 1} and {mu1 of fit 9} and {mu1' }),
    );
    expect([refused.status, refused.code]).toEqual([422, 'invalid']);
    expect(refused.details).toMatchObject([
      {
        path: 'statement',
        line: 2,
        column: 5,
        message: expect.stringContaining('it has mu1, A1, phi1') as string,
      },
      { line: 2, column: 24, message: 'There is no fit 9 in this notebook. It has fit 1.' },
      { line: 2, column: 43, message: expect.stringContaining('isn’t closed') as string },
    ]);
    expect(await read()).toMatchObject({ text: '', history: [] });
    expect((await errorOf(await patch({ revision: 1, statement: 'x'.repeat(10_001) }))).status).toBe(422);
  });

  it('is typeset without being stored while somebody writes it', async () => {
    const answer = await call(typeset, {
      params: { id: notebook },
      token: analyst.token,
      json: { text: '{mu1 of fit 1} {mu1 of fit 2}' },
    });
    const { paragraphs, faults, fits } = typesetStatementSchema.parse(await answer.json());
    expect(paragraphs[0]).toHaveLength(3);
    expect(faults.map(({ column }) => column)).toEqual([16]);
    expect(fits.map(({ number }) => number)).toEqual([1]);
    expect((await read()).text).toBe('');
  });

  it('shows a referee the words and lets them change nothing', async () => {
    await save('Words.', 1);
    const referee = await createMember(group, 'referee');
    expect((await read('', referee.token)).text).toBe('Words.');
    expect((await errorOf(await patch({ revision: 2, statement: '' }, referee.token))).status).toBe(403);
  });

  it('withholds every fitted number of a blind measurement', async () => {
    await end('converged');
    await save('{mu1 of fit 1} {gate of fit 1} {bins of fit 1}', 1);
    await Measurement.update({ blind: true }, { where: { groupId: group } });
    const body = JSON.stringify(await read());
    expect(body).not.toContain('3.6');
    expect(values((await read()).paragraphs).map(({ value }) => value)).toEqual([null, null, '36']);
  });

  it('of a revision to come is refused', async () => {
    const answer = await call(readStatement, {
      params: { id: notebook },
      token: analyst.token,
      path: '/?revision=9',
    });
    expect((await errorOf(answer)).message).toContain('revision 1 stands');
  });
});
