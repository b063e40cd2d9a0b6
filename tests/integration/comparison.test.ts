import { readFileSync } from 'node:fs';
import path from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { GET as comparison } from '@/app/api/v1/notebooks/[id]/comparison/route';
import { POST as compare } from '@/app/api/v1/notebooks/[id]/comparisons/route';
import { GET as readNotebook, PATCH as patch } from '@/app/api/v1/notebooks/[id]/route';
import {
  comparisonSchema,
  comparisonStartedSchema,
  measurementCreatedSchema,
  notebookCreatedSchema,
  notebookSchema,
  type Comparison,
} from '@/lib/schemas';
import { AuditEvent, Fit, NotebookRevision } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, createMember, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  fitEnded,
  fitOf,
  oneField,
  openDesk,
  openNotebook,
  startFit,
  startWorker,
  type Desk,
} from './sampling';
import { uploadTo } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
  await buildWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeConnections();
});

const start = ({ token }: Desk, id: string, json: Record<string, unknown> = {}) =>
  call(compare, { params: { id }, token, json });

async function started(desk: Desk, id: string, json: Record<string, unknown> = {}) {
  const answer = await start(desk, id, json);
  if (answer.status !== 202) throw new Error(`${answer.status}: ${await answer.text()}`);
  return comparisonStartedSchema.parse(await answer.json());
}

const tableOf = async ({ token }: Desk, id: string): Promise<Comparison> =>
  comparisonSchema.parse(await (await call(comparison, { params: { id }, token })).json());

const notebookOf = async ({ token }: Desk, id: string) =>
  notebookSchema.parse(await (await call(readNotebook, { params: { id }, token })).json());

interface Exact {
  logZ: number;
}

interface Posterior {
  kappa_lo: number[];
  kappa_hi: number[];
  S: number[];
  covariance: number[][];
  model: {
    prior_mu: { lo: number; hi: number };
    prior_osc: { mean: number; sd: number };
    prior_smooth: { mean: number; sd: number };
  };
  exact: { none: Exact; one: Exact; two?: Exact };
}

/** Exact evidences derived by us: tests/published/data/posteriors/README.md. */
const posteriorOf = (name: 'null' | 'two-field'): Posterior =>
  JSON.parse(
    readFileSync(path.join(process.cwd(), `tests/published/data/posteriors/${name}.json`), 'utf8'),
  ) as Posterior;

/** A notebook of the model of a posterior with known evidences, as one field of free phase. */
async function openPosterior({ group, token }: Desk, { model, ...data }: Posterior): Promise<string> {
  const rows = data.S.map((value, i) => [data.kappa_lo[i], data.kappa_hi[i], value].join(','));
  const uploaded = await uploadTo(group, token, {
    file: { name: 'points.csv', bytes: ['kappa_lo,kappa_hi,S', ...rows].join('\n') },
    covariance: {
      name: 'covariance.txt',
      bytes: data.covariance.map((row) => row.join(' ')).join('\n'),
    },
  });
  const { id: measurement } = measurementCreatedSchema.parse(await uploaded.json());
  const normal = ({ mean, sd }: { mean: number; sd: number }) => ({ kind: 'normal', mean, sd });
  const { prior_mu: mass, prior_osc: wave, prior_smooth: smooth } = model;
  const answer = await call(createNotebook, {
    params: { id: group },
    token,
    json: {
      title: 'Known evidences',
      measurement,
      template: oneField,
      priors: {
        mu1: { kind: 'uniform', lo: mass.lo, hi: mass.hi },
        a1: normal(wave),
        b1: normal(wave),
        c1: normal(smooth),
        c2: normal(smooth),
      },
    },
  });
  return notebookCreatedSchema.parse(await answer.json()).id;
}

/** Hill's expansion of Student's quantile in powers of 1/ν from the normal one, at probability 0.99995; to 0.5 % from ν = 15 on. */
function studentBound(dof: number): number {
  const z = 3.8905919;
  return (
    z +
    (z ** 3 + z) / (4 * dof) +
    (5 * z ** 5 + 16 * z ** 3 + 3 * z) / (96 * dof ** 2) +
    (3 * z ** 7 + 19 * z ** 5 + 17 * z ** 3 - 15 * z) / (384 * dof ** 3)
  );
}

describe('comparing the number of fields', () => {
  it.each(['two-field', 'null'] as const)(
    'gives the known Bayes factors of %s from fits that it starts itself',
    { timeout: 240_000 },
    async (name) => {
      const desk = await openDesk();
      const known = posteriorOf(name);
      const id = await openPosterior(desk, known);
      const { fits, skipped, revision } = await started(desk, id, { maxDraws: 3_000, seed: name });
      expect(skipped).toEqual([]);
      expect(fits.map(({ fields, reused }) => [fields, reused])).toEqual([
        [0, false],
        [1, false],
        [2, false],
      ]);
      expect(revision).toBe(4);
      const worker = startWorker();
      for (const { id: fit } of fits) await fitEnded(desk, fit);
      await worker.stop();
      const table = await tableOf(desk, id);
      expect(table.counts.slice(0, 3).map(({ fit }) => fit)).toEqual(fits.map(({ id: fit }) => fit));
      expect(table.counts.slice(3).map(({ fit, because }) => [fit, because])).toEqual([
        [null, null],
        [null, null],
      ]);
      const { none, one, two } = known.exact;
      const exact = [none, one, ...(two ? [two] : [])];
      exact.forEach(({ logZ }, fields) => {
        const { lnBayesNone } = table.counts[fields];
        if (!lnBayesNone) throw new Error(`no Bayes factor with ${fields} fields`);
        const off = Math.abs(lnBayesNone.value - (logZ - none.logZ));
        expect(off, `${fields} fields`).toBeLessThan(
          studentBound(lnBayesNone.dof) * lnBayesNone.error + 1e-6,
        );
        if (fields > 0) expect(lnBayesNone.error, `${fields} fields`).toBeLessThan(0.1);
      });
      const best = table.counts.find(({ lnBayesBest }) => lnBayesBest?.value === 0);
      expect(best?.fields).toBe(name === 'null' ? 0 : 2);
      const [set] = table.sets;
      expect([table.sets.length, set.standing, set.apart, set.fits.length]).toEqual([1, true, null, 3]);
      expect(set.fits.map(({ fields, exact: sampledNot }) => [fields, sampledNot]).sort()).toEqual([
        [0, true],
        [1, false],
        [2, false],
      ]);
      expect(table.widths.map(({ fields, curve }) => [fields, curve.method, curve.parameters])).toEqual([
        [1, 'exact', ['a1', 'b1']],
        [2, 'reweighted', ['a1', 'b1', 'a2', 'b2']],
      ]);
      for (const { curve } of table.widths) {
        expect(curve.sd).toBe(known.model.prior_osc.sd);
        expect(curve.points.find(({ factor }) => factor === 1)?.difference).toBeCloseTo(0, 9);
      }
      // A further field has the priors of the first one.
      const { snapshot } = await fitOf(desk, fits[2].id);
      const { mean, sd } = known.model.prior_smooth;
      expect(snapshot.priors.mu2).toEqual(snapshot.priors.mu1);
      expect(snapshot.priors.b2).toEqual(snapshot.priors.b1);
      expect(snapshot.priors.c1).toEqual({ kind: 'normal', mean, sd });
    },
  );

  it('takes the fits that are there, so that asking twice changes nothing', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: oneField });
    const first = await startFit(desk, id, { maxDraws: 400 });
    const once = await started(desk, id);
    expect(once.fits.map(({ fields, reused }) => [fields, reused])).toEqual([
      [0, false],
      [1, true],
      [2, false],
    ]);
    expect(once.fits[1].id).toBe(first);
    const before = await notebookOf(desk, id);
    const twice = await started(desk, id);
    expect(twice.fits.map(({ id: fit, reused }) => [fit, reused])).toEqual(
      once.fits.map(({ id: fit }) => [fit, true]),
    );
    expect(twice.revision).toBe(once.revision);
    expect((await notebookOf(desk, id)).revision).toBe(before.revision);
    expect(await Fit.count({ where: { notebookId: id } })).toBe(3);

    // A failed fit gives no evidence: the next command starts it anew. Another seed is another snapshot.
    await Fit.update({ status: 'failed' }, { where: { id: once.fits[0].id } });
    const again = await started(desk, id);
    expect(again.fits.map(({ reused }) => reused)).toEqual([false, true, true]);
    const seeded = await started(desk, id, { seed: 'another', fields: [1] });
    expect(seeded.fits.map(({ fields, reused }) => [fields, reused])).toEqual([[1, false]]);
  });

  it('is one transaction at a time: two commands at once start one set of fits', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: oneField });
    const [one, other] = await Promise.all([started(desk, id), started(desk, id)]);
    expect(one.fits.map(({ id: fit }) => fit)).toEqual(other.fits.map(({ id: fit }) => fit));
    expect(await Fit.count({ where: { notebookId: id } })).toBe(3);
  });

  it('gives each fit the revision that it froze, and brings the standing settings back', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: oneField });
    const before = await notebookOf(desk, id);
    const { fits } = await started(desk, id, { fields: [3, 0, 1] });
    const after = await notebookOf(desk, id);
    expect(fits.map(({ fields }) => fields)).toEqual([0, 1, 3]);
    expect([after.template, after.priors, after.cuts]).toEqual([before.template, before.priors, before.cuts]);
    expect(after.record.map(({ revision, restoredFrom }) => [revision, restoredFrom])).toEqual([
      [1, null],
      [2, null],
      [3, null],
      [4, 1],
    ]);
    for (const { id: fit } of fits) {
      const { revision, snapshot } = await fitOf(desk, fit);
      const row = await NotebookRevision.findOne({ where: { notebookId: id, revision } });
      expect(row?.settings.template).toEqual(snapshot.template);
    }
    expect((await fitOf(desk, fits[1].id)).revision).toBe(4);
    const logged = await AuditEvent.findAll({ where: { subjectId: [id, ...fits.map((fit) => fit.id)] } });
    expect(logged.map(({ action }) => action).filter((action) => action === 'fit.start')).toHaveLength(3);
    expect(logged.map(({ action }) => action)).toContain('notebook.compare');
  });

  it('sets fits of other bins apart, with the reason', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: oneField });
    await startFit(desk, id, { maxDraws: 400 });
    const edit = { revision: 1, cuts: { kappaMax: 0.2 } };
    await call(patch, { method: 'PATCH', params: { id }, token: desk.token, json: edit });
    await startFit(desk, id, { maxDraws: 400 });
    await call(patch, {
      method: 'PATCH',
      params: { id },
      token: desk.token,
      json: { revision: 2, likelihood: { kind: 'sellentin-heavens' } },
    });
    const other = await startFit(desk, id, { maxDraws: 400 });
    const { sets } = await tableOf(desk, id);
    expect(sets.map(({ apart, evidenceKind, fits }) => [apart, evidenceKind, fits.length])).toEqual([
      // The matched form's evidence is of the other's exponent, so that both are compared.
      [null, 'sellentin-heavens', 2],
      ['it keeps other bins', 'sellentin-heavens', 1],
    ]);
    expect(sets[0].fits.at(-1)?.id).toBe(other);
    expect(sets[0].fits.every(({ noEvidence }) => noEvidence === 'the fit hasn’t ended yet')).toBe(true);
  });

  it('is refused without a family of fields, and to those who may not start fits', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const refused = await errorOf(await start(desk, id));
    expect([refused.status, refused.code]).toEqual([422, 'invalid']);
    expect((await tableOf(desk, id)).noFamily).toContain('has no fields');
    expect(await Fit.count({ where: { notebookId: id } })).toBe(0);
    const referee = await createMember(desk.group, 'referee');
    expect(
      (await errorOf(await call(compare, { params: { id }, token: referee.token, json: {} }))).status,
    ).toBe(403);
    const free = await openNotebook(desk, { template: oneField });
    expect((await errorOf(await start(desk, free, { fields: [5] }))).status).toBe(422);
  });

  it('says which number of fields can’t be fitted, and starts the others', async () => {
    const desk = await openDesk();
    const priors = { mu1: { kind: 'fixed', value: 3 } };
    const id = await openNotebook(desk, { template: oneField, priors });
    const { fits, skipped } = await started(desk, id);
    expect(fits.map(({ fields }) => fields)).toEqual([0, 1]);
    expect(skipped.map(({ fields }) => fields)).toEqual([2]);
    expect(skipped[0].reason).toMatch(/order/);
  });
});
