import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Fit, Notebook, NotebookRevision } from '@/models';
import { PATCH as changeRole, DELETE as removeMember } from '@/app/api/v1/groups/[id]/members/[userId]/route';
import { GET, PATCH } from '@/app/api/v1/notebooks/[id]/route';
import { GET as events } from '@/app/api/v1/notebooks/[id]/events/route';
import { database } from '@/lib/db';
import { notebookSchema, presenceSchema, type Notebook as NotebookAnswer } from '@/lib/schemas';
import { call, closeConnections, createGroup, createMember, errorOf, type CallOptions } from './harness';
import { background, fitOf, openNotebook, startFit, stopFit } from './sampling';

type Person = Awaited<ReturnType<typeof createMember>>;
let group: string;
let first: Person;
let second: Person;
beforeAll(async () => {
  database();
  group = await createGroup();
  [first, second] = [await createMember(group, 'lead'), await createMember(group, 'analyst')];
});
afterAll(closeConnections);

const deskOf = ({ token }: Person) => ({ group, token });
const open = () => openNotebook(deskOf(first), { template: background });
const edit = (id: string, json: Record<string, unknown>, { token }: Person) =>
  call(PATCH, { method: 'PATCH', params: { id }, token, json });
const read = async (id: string, { token }: Person): Promise<NotebookAnswer> =>
  notebookSchema.parse(await (await call(GET, { params: { id }, token })).json());

interface Heard {
  event: string;
  data: unknown;
  at: number;
}

/** Listens to the page's stream until `stop`; what was heard grows. */
async function listen(id: string, { token }: Person, path = '/') {
  const ending = new AbortController();
  const options: CallOptions = { params: { id }, token, signal: ending.signal, path };
  const answer = await call(events, options);
  expect(answer.headers.get('content-type')).toContain('text/event-stream');
  const heard: Heard[] = [];
  const state = { ended: false };
  const done = (async () => {
    const decoder = new TextDecoder();
    let text = '';
    try {
      for await (const chunk of answer.body as unknown as AsyncIterable<Uint8Array>) {
        text += decoder.decode(chunk, { stream: true });
        const frames = text.split('\n\n');
        text = frames.pop() ?? '';
        for (const frame of frames) {
          const match = /^event: (\w+)\ndata: (.*)$/.exec(frame);
          if (match) heard.push({ event: match[1], data: JSON.parse(match[2]) as unknown, at: Date.now() });
        }
      }
    } catch (error) {
      if (!ending.signal.aborted) throw error;
    }
    state.ended = true;
  })();
  const notebooks = () =>
    heard
      .filter(({ event }) => event === 'notebook')
      .map(({ data, at }) => ({ at, ...notebookSchema.parse(data) }));
  const others = () =>
    heard.filter(({ event }) => event === 'presence').map(({ data }) => presenceSchema.parse(data).others);
  return {
    heard,
    state,
    notebooks,
    others,
    stop: async () => {
      ending.abort();
      await done;
    },
  };
}

const soon = <T>(check: () => T, timeout = 3_000) => expect.poll(check, { timeout, interval: 20 });

describe('two people editing one notebook', () => {
  it('lose nothing: of 50 interleaved saves each is in the record once, whoever had to repeat', async () => {
    const id = await open();
    const wanted = 25;
    let refused = 0;
    const write = async (person: Person, name: 'c1' | 'c2') => {
      let { revision } = await read(id, person);
      for (let n = 1; n <= wanted; n += 1) {
        for (;;) {
          const answer = await edit(
            id,
            { revision, priors: { [name]: { kind: 'normal', mean: 0, sd: n } } },
            person,
          );
          if (answer.status === 200) {
            revision = notebookSchema.parse(await answer.json()).revision;
            break;
          }
          expect(await errorOf(answer)).toMatchObject({ status: 409, code: 'stale_revision' });
          refused += 1;
          ({ revision } = await read(id, person));
        }
      }
    };
    await Promise.all([write(first, 'c1'), write(second, 'c2')]);
    const revisions = await NotebookRevision.findAll({
      where: { notebookId: id },
      order: [['revision', 'ASC']],
    });
    expect(revisions.map(({ revision }) => revision)).toEqual(Array.from({ length: 51 }, (_, i) => i + 1));
    const sds = (name: string) => revisions.map(({ settings }) => Number(settings.priors[name].sd));
    for (const name of ['c1', 'c2']) {
      const kept = sds(name)
        .slice(1)
        .filter((sd, i) => sd !== sds(name)[i]);
      expect(kept).toEqual(Array.from({ length: wanted }, (_, i) => i + 1));
    }
    // That they met at all is what makes the rest say something.
    expect(refused).toBeGreaterThan(0);
  });

  it('see each other’s saves within a second, whole and in order', async () => {
    const id = await open();
    const ear = await listen(id, second);
    await soon(() => ear.notebooks().length).toBe(1);
    for (let revision = 1; revision <= 5; revision += 1) {
      const saved = Date.now();
      expect((await edit(id, { revision, title: `Title ${revision + 1}` }, first)).status).toBe(200);
      await soon(() => ear.notebooks().at(-1)?.title).toBe(`Title ${revision + 1}`);
      expect(ear.notebooks().at(-1)!.at - saved).toBeLessThan(1_000);
    }
    expect(ear.notebooks().map(({ revision }) => revision)).toEqual([1, 2, 3, 4, 5, 6]);
    expect(ear.notebooks().at(-1)).toMatchObject(await read(id, second));
    await ear.stop();
    // Whoever comes back is told what stands, from the database.
    const again = await listen(id, second);
    await soon(() => again.notebooks().map(({ revision }) => revision)).toEqual([6]);
    await again.stop();
  });

  it('are told who else has it open, and when they leave', async () => {
    const id = await open();
    const one = await listen(id, first);
    await soon(() => one.others().at(-1)).toEqual([]);
    const two = await listen(id, second);
    const twice = await listen(id, second);
    await soon(() => one.others().at(-1)).toEqual([second.user.email]);
    await soon(() => two.others().at(-1)).toEqual([first.user.email]);
    await twice.stop();
    await new Promise((resolve) => setTimeout(resolve, 200));
    expect(one.others().at(-1)).toEqual([second.user.email]);
    await two.stop();
    await soon(() => one.others().at(-1)).toEqual([]);
    await one.stop();
  });
});

describe('the stream of a page', () => {
  it('carries one fit of the notebook beside it, and tells of one that another person starts', async () => {
    const id = await open();
    const plain = await listen(id, second);
    const fit = await startFit(deskOf(first), id, { seed: 1 });
    await soon(() =>
      plain
        .notebooks()
        .at(-1)
        ?.fits.map(({ status }) => status),
    ).toEqual(['queued']);
    await plain.stop();
    const both = await listen(id, second, `/?fit=${fit}`);
    const statuses = () =>
      both.heard.flatMap(({ event, data }) => (event === 'fit' ? [(data as { status: string }).status] : []));
    await soon(statuses).toEqual(['queued']);
    await stopFit(deskOf(first), fit);
    await soon(statuses, 5_000).toEqual(['queued', 'stopped']);
    // The fit's end isn't the page's.
    expect((await edit(id, { revision: 1, title: 'Still told' }, first)).status).toBe(200);
    await soon(() => both.notebooks().at(-1)?.title).toBe('Still told');
    await both.stop();
    expect((await fitOf(deskOf(second), fit)).status).toBe('stopped');
  });

  it('gives nothing of a fit of another notebook', async () => {
    const [id, other] = [await open(), await open()];
    const fit = await startFit(deskOf(first), other, { seed: 1 });
    const ear = await listen(id, first, `/?fit=${fit}`);
    await soon(() => ear.state.ended).toBe(true);
    expect(ear.heard.filter(({ event }) => event === 'fit')).toEqual([]);
    await stopFit(deskOf(first), fit);
  });

  it('ends for a member who was removed, and tells a changed role what it may do', async () => {
    const guest = await createMember(group, 'analyst');
    const id = await open();
    const ear = await listen(id, guest);
    await soon(() => ear.notebooks().at(-1)?.may.includes('notebook.edit')).toBe(true);
    const member = { id: group, userId: guest.user.userId };
    const demoted = await call(changeRole, {
      method: 'PATCH',
      params: member,
      token: first.token,
      json: { role: 'referee' },
    });
    expect(demoted.status).toBe(200);
    await edit(id, { revision: 1, title: 'Seen by a referee' }, first);
    await soon(() => ear.notebooks().at(-1)?.may.includes('notebook.edit')).toBe(false);
    await call(removeMember, { method: 'DELETE', params: member, token: first.token });
    await edit(id, { revision: 2, title: 'Unseen' }, first);
    await soon(() => ear.state.ended).toBe(true);
    expect(JSON.stringify(ear.heard)).not.toContain('Unseen');
  });

  it('ends when the notebook is erased', async () => {
    const id = await open();
    const ear = await listen(id, second);
    await soon(() => ear.notebooks().length).toBe(1);
    const { DELETE } = await import('@/app/api/v1/notebooks/[id]/route');
    const answer = await call(DELETE, { method: 'DELETE', params: { id }, token: first.token });
    expect(answer.status).toBe(200);
    await soon(() => ear.state.ended).toBe(true);
    expect(await Notebook.count({ where: { id } })).toBe(0);
    expect(await Fit.count({ where: { notebookId: id } })).toBe(0);
  });
});
