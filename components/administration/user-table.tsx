'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { Button, Buttons } from '@/components/ui/button';
import { EmptyState } from '@/components/ui/empty-state';
import { Field } from '@/components/ui/field';
import { Stamp } from '@/components/ui/num';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import { capital, counted } from '@/components/words/counts';
import type { SiteUser, SiteUsers } from '@/lib/schemas';

const path = '/api/v1/administration/users';

type Kind = 'disable' | 'enable' | 'sessions';
interface Question {
  kind: Kind;
  user: SiteUser;
}

const acts: Record<Kind, { act: string; keep: string; busy: string; refused: string }> = {
  disable: {
    act: 'Shut them out',
    keep: 'Leave them in',
    busy: 'Shutting out …',
    refused: 'They may still sign in',
  },
  enable: {
    act: 'Let them in again',
    keep: 'Leave them out',
    busy: 'Letting in …',
    refused: 'They are still shut out',
  },
  sessions: {
    act: 'End the sessions',
    keep: 'Leave them',
    busy: 'Ending …',
    refused: 'The sessions were not ended',
  },
};

function questionOf({ kind, user }: Question): string {
  if (kind === 'disable')
    return `Shut ${user.email} out? Their sessions end and their tokens are refused at once; memberships and work stay as they are.`;
  if (kind === 'enable') return `Let ${user.email} sign in again? Their tokens work again, too.`;
  return `End ${counted(user.sessions, 'session')} of ${user.email}? Their browsers have to sign in anew; tokens go on working.`;
}

const doneOf = ({ kind, user }: Question): string =>
  ({
    disable: `${user.email} is shut out.`,
    enable: `${user.email} may sign in again.`,
    sessions: `The sessions of ${user.email} are ended.`,
  })[kind];

const buttonId = ({ kind, user }: Question) => `${kind === 'sessions' ? 'end' : 'in-or-out'}-${user.userId}`;

function act({ kind, user }: Question): Promise<SiteUser> {
  if (kind === 'sessions') return send('DELETE', `${path}/${user.userId}/sessions`);
  return send('PATCH', `${path}/${user.userId}`, { disabled: kind === 'disable' });
}

function Rows({ users, reader, ask }: { users: SiteUser[]; reader: string; ask: (q: Question) => void }) {
  return (
    <DataTable
      label="Users"
      ruled
      phoneColumns="minmax(0,1fr)"
      columns={[
        { key: 'email', head: 'User', phone: { area: '1 / 1' } },
        { key: 'groups', head: 'Groups', phone: { area: '2 / 1', label: 'groups' } },
        { key: 'last', head: 'Last sign-in', phone: { area: '3 / 1', label: 'last sign-in' } },
        { key: 'open', head: 'Sessions, tokens', phone: { area: '4 / 1', label: 'sessions, tokens' } },
        { key: 'actions', head: <span className="sr-only">Actions</span>, phone: { area: '5 / 1' } },
      ]}
      rows={users.map((user) => ({
        key: user.userId,
        cells: {
          email: (
            <span className="wrap-anywhere">
              {user.email}
              {user.siteAdmin ? <span className="text-ink-2">, site administrator</span> : null}
              {user.disabledAt ? (
                <span className="block">
                  <StateWord kind="wait">shut out</StateWord> <Stamp at={user.disabledAt} />
                </span>
              ) : null}
            </span>
          ),
          groups: user.groups.length
            ? user.groups.map(({ name, role }) => `${name}, ${role}`).join('; ')
            : 'none',
          last: user.lastSignInAt ? <Stamp at={user.lastSignInAt} /> : 'never',
          open: `${user.sessions}, ${user.tokens}`,
          actions: (
            <span className="inline-flex flex-wrap gap-x-2">
              {user.sessions > 0 ? (
                <WordButton
                  id={buttonId({ kind: 'sessions', user })}
                  of={`of ${user.email}`}
                  onClick={() => ask({ kind: 'sessions', user })}
                >
                  End sessions
                </WordButton>
              ) : null}
              {user.userId === reader ? null : (
                <WordButton
                  id={buttonId({ kind: 'disable', user })}
                  of={user.email}
                  onClick={() => ask({ kind: user.disabledAt ? 'enable' : 'disable', user })}
                >
                  {user.disabledAt ? 'Let in' : 'Shut out'}
                </WordButton>
              )}
            </span>
          ),
        },
      }))}
    />
  );
}

/** Who has an account: where they belong, when they last came, and whether they may come in. */
export function UserTable({ initial, reader }: { initial: SiteUsers; reader: string }) {
  const [search, setSearch] = useState('');
  const [pages, setPages] = useState<string[]>([]);
  const [asked, setAsked] = useState<Question | null>(null);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<{ title: string; error: RequestError } | null>(null);
  const [said, setSaid] = useState('');
  const after = pages.at(-1);
  const query = new URLSearchParams({
    ...(search ? { search } : {}),
    ...(after ? { after } : {}),
  }).toString();
  const { data = initial, mutate } = useSWR(query ? `${path}?${query}` : path, read<SiteUsers>, {
    fallbackData: query ? undefined : initial,
    keepPreviousData: true,
  });

  function ask(question: Question | null) {
    if (question === null && asked) document.getElementById(buttonId(asked))?.focus();
    setSaid('');
    setError(null);
    setAsked(question);
  }

  async function go(question: Question) {
    setBusy(true);
    try {
      await act(question);
      await mutate();
      setSaid(doneOf(question));
      setAsked(null);
      requestAnimationFrame(() =>
        (document.getElementById(buttonId(question)) ?? document.getElementById('users-list'))?.focus(),
      );
    } catch (thrown) {
      setError({ title: acts[question.kind].refused, error: asRequestError(thrown) });
    }
    setBusy(false);
  }

  return (
    <div id="users-list" tabIndex={-1} className="border-t border-ink pt-2 outline-none">
      <div className="max-w-[460px]">
        <Field
          label="Find by address"
          name="search"
          type="search"
          autoComplete="off"
          value={search}
          onChange={(event) => {
            setSearch(event.target.value.trim());
            setPages([]);
          }}
          help={<span role="status">{capital(counted(data.count, 'user'))} found.</span>}
        />
      </div>
      {data.users.length ? (
        <Rows users={data.users} reader={reader} ask={ask} />
      ) : (
        <div className="mt-3">
          <EmptyState>Nobody’s address contains this.</EmptyState>
        </div>
      )}
      {asked ? (
        <Asking
          key={`${asked.kind}-${asked.user.userId}`}
          question={questionOf(asked)}
          act={acts[asked.kind].act}
          keep={acts[asked.kind].keep}
          busy={busy ? acts[asked.kind].busy : undefined}
          onAct={() => void go(asked)}
          onKeep={() => ask(null)}
        />
      ) : null}
      {error ? <RequestMessage error={error.error} title={error.title} /> : null}
      {pages.length || data.next ? (
        <Buttons>
          {pages.length ? <Button onClick={() => setPages(pages.slice(0, -1))}>Page before</Button> : null}
          {data.next ? (
            <Button onClick={() => data.next && setPages([...pages, data.next])}>Next page</Button>
          ) : null}
        </Buttons>
      ) : null}
      <p role="status" className="mb-1 font-controls text-note text-ink-2">
        {said}
      </p>
    </div>
  );
}
