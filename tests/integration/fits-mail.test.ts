import { Op } from 'sequelize';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { Fit, FitMail } from '@/models';
import { PATCH as changeSettings } from '@/app/api/v1/me/settings/route';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { listMailbox } from '@/lib/mail';
import type { FitStatus } from '@/lib/schemas';
import { emptyReport } from '@/lib/schemas/stored-report';
import { commitLook } from '@/lib/services/fit-commit';
import { failFit, takeLease } from '@/lib/services/fit-lease';
import { sendDueMails } from '@/lib/services/fit-mails';
import { call, closeConnections, createGroup, createMember } from './harness';
import { background, openNotebook, startFit, stopFit, type Desk } from './sampling';

let mine: Desk & { email: string };
let other: Desk;
let notebook: string;
beforeAll(async () => {
  database();
  const group = await createGroup('Mail readers');
  const [analyst, lead] = [await createMember(group, 'analyst'), await createMember(group, 'lead')];
  mine = { group, token: analyst.token, email: analyst.user.email };
  other = { group, token: lead.token };
  notebook = await openNotebook(mine, { template: background });
});
beforeEach(() => FitMail.update({ sentAt: new Date() }, { where: { sentAt: { [Op.is]: null } } }));
afterAll(async () => {
  await Fit.update({ status: 'stopped' }, { where: { notebookId: notebook } });
  await closeQueue();
  await closeConnections();
});

/** Mails to the person who started the fits, the newest first. */
const received = async () => ((await listMailbox()) ?? []).filter(({ to }) => to === mine.email);

const due = () => FitMail.count({ where: { sentAt: { [Op.is]: null } } });

/** A fit that ends as a worker ends it, in one transaction; nothing is sent by that. */
async function endFit(status: FitStatus): Promise<string> {
  const id = await startFit(mine, notebook, { seed: 1 });
  const epoch = await database().transaction((transaction) => takeLease(id, 60_000, undefined, transaction));
  if (status === 'failed') expect(await failFit(id, epoch!, 'μ = 3.14 can’t be')).toBe(true);
  else await commitLook({ fitId: id, epoch: epoch!, draws: 0, report: emptyReport, judge: () => status });
  return id;
}

describe('the mail about the end of a fit', () => {
  it.each([
    ['converged', 'has met its target'],
    ['budget-spent', 'has used its draws up'],
    ['failed', 'has failed'],
  ] as const)('that is %s goes to who started it, with a link and no value', async (status, words) => {
    const before = (await received()).length;
    const id = await endFit(status);
    expect(await due()).toBe(1);
    expect(await sendDueMails()).toBe(1);
    const mails = await received();
    expect(mails).toHaveLength(before + 1);
    const { number } = await Fit.findByPk(id, { rejectOnEmpty: true });
    const { subject, text, links } = mails[0];
    expect(text).toContain(words);
    expect(subject).toBe(`Fit ${number} of notebook 1 has ended`);
    expect(links.some((link) => link.endsWith(`/notebooks/${notebook}?fit=${number}`))).toBe(true);
    // No number but those of fit and notebook, beside the addresses.
    const prose = text.replace(/http\S+/g, '').replace(`fit ${number} of notebook 1`, '');
    expect(prose).not.toMatch(/\d/);
  });

  it('that was stopped goes out if somebody else stopped it, and not to who stopped their own', async () => {
    const own = await startFit(mine, notebook, { seed: 1 });
    await stopFit(mine, own);
    expect(await due()).toBe(0);
    const theirs = await startFit(mine, notebook, { seed: 1 });
    await stopFit(other, theirs);
    expect(await sendDueMails()).toBe(1);
    expect((await received())[0].text).toContain('stopped by another member');
  });

  it('is sent once, however many look for it at once and however often', async () => {
    const before = (await received()).length;
    await endFit('converged');
    await endFit('budget-spent');
    const sent = await Promise.all([sendDueMails(), sendDueMails(), sendDueMails(), sendDueMails()]);
    expect(sent.reduce((a, b) => a + b)).toBe(2);
    expect(await sendDueMails()).toBe(0);
    expect(await received()).toHaveLength(before + 2);
  });

  it('is sent by the next one if its sender died between taking and sending it', async () => {
    const before = (await received()).length;
    await endFit('converged');
    const held = { heldUntil: new Date(Date.now() + 60_000), attempts: 1 };
    await FitMail.update(held, { where: { sentAt: { [Op.is]: null } } });
    expect(await sendDueMails()).toBe(0);
    expect(await sendDueMails(() => new Date(Date.now() + 61_000))).toBe(1);
    expect(await sendDueMails(() => new Date(Date.now() + 122_000))).toBe(0);
    expect(await received()).toHaveLength(before + 1);
  });

  it('isn’t noted where the end is rolled back', async () => {
    const id = await startFit(mine, notebook, { seed: 1 });
    const epoch = await database().transaction((transaction) =>
      takeLease(id, 60_000, undefined, transaction),
    );
    const judge = () => {
      throw new Error('the connection broke');
    };
    const look = { fitId: id, epoch: epoch!, draws: 0, report: emptyReport };
    await expect(commitLook({ ...look, judge })).rejects.toThrow('broke');
    expect(await due()).toBe(0);
    await commitLook({ ...look, judge: () => 'converged' });
    // The answer was lost: the worker asks again.
    await commitLook({ ...look, judge: () => 'converged' });
    expect(await due()).toBe(1);
  });

  it('isn’t sent to who has switched it off', async () => {
    const json = { mailAboutFits: false };
    const answer = await call(changeSettings, { method: 'PATCH', token: mine.token, json });
    expect(await answer.json()).toEqual(json);
    await endFit('converged');
    expect(await due()).toBe(0);
  });
});
