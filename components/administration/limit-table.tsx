'use client';

import { useState } from 'react';
import useSWR from 'swr';
import { asRequestError, detailAt, read, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { NumberField } from '@/components/ui/number-field';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import type { FitLimits } from '@/lib/schemas';

const path = '/api/v1/administration/limits';

/** A row of the table: a group, or every group without a limit of its own. */
interface Scope {
  groupId: string | null;
  name: string;
  limit: number | null;
}

const buttonId = ({ groupId }: Scope) => `limit-${groupId ?? 'every'}`;

/** How many fits a group may run at once, its own limit before everybody's; what runs is left alone when it changes. */
export function LimitTable({ initial }: { initial: FitLimits }) {
  const { data = initial, mutate } = useSWR(path, read<FitLimits>, {
    fallbackData: initial,
    refreshInterval: 10_000,
  });
  const [asked, setAsked] = useState<Scope | null>(null);
  const [fits, setFits] = useState<number | null>(null);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');
  const standard = data.everyGroup ?? data.configured;
  const every: Scope = { groupId: null, name: 'every other group', limit: data.everyGroup };

  function ask(scope: Scope | null) {
    if (scope === null && asked) document.getElementById(buttonId(asked))?.focus();
    setError(null);
    setSaid('');
    setFits(scope === null ? null : (scope.limit ?? standard));
    setAsked(scope);
  }

  async function set(scope: Scope, limit: number | null) {
    setBusy(true);
    setError(null);
    try {
      const changed = await send<FitLimits>('PATCH', path, { groupId: scope.groupId, fits: limit });
      await mutate(changed, { revalidate: false });
      setAsked(null);
      setSaid(
        limit === null
          ? `No limit of its own holds any more for ${scope.name}.`
          : `From the next fit on, ${limit} at once for ${scope.name}.`,
      );
      document.getElementById(buttonId(scope))?.focus();
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
    setBusy(false);
  }

  const change = (scope: Scope) => (
    <span className="inline-flex flex-wrap gap-x-2">
      <WordButton id={buttonId(scope)} of={`the limit of ${scope.name}`} onClick={() => ask(scope)}>
        Change
      </WordButton>
      {scope.limit === null ? null : (
        <WordButton of={`the limit of ${scope.name}`} onClick={() => void set(scope, null)}>
          Take back
        </WordButton>
      )}
    </span>
  );

  return (
    <>
      <DataTable
        label="Fits of a group at once"
        ruled
        phoneColumns="minmax(0,1fr) auto"
        columns={[
          { key: 'name', head: 'Group', phone: { area: '1 / 1' } },
          { key: 'limit', head: 'At once', numeric: true, phone: { area: '1 / 2', label: 'at once' } },
          { key: 'running', head: 'Running', numeric: true, phone: { area: '2 / 2', label: 'running' } },
          { key: 'waiting', head: 'Waiting', numeric: true, phone: { area: '3 / 2', label: 'waiting' } },
          {
            key: 'actions',
            head: <span className="sr-only">Actions</span>,
            phone: { area: '2 / 1 / 4 / 2' },
          },
        ]}
        rows={[
          ...data.groups.map(({ id, name, limit, running, waiting }) => ({
            key: id,
            cells: {
              name: <span className="wrap-anywhere">{name}</span>,
              limit: limit ?? <span className="text-ink-2">{standard}</span>,
              running,
              waiting,
              actions: change({ groupId: id, name, limit }),
            },
          })),
          {
            key: 'every',
            cells: {
              name: <i>{every.name}</i>,
              limit: standard,
              running: '–',
              waiting: '–',
              actions: change(every),
            },
          },
        ]}
      />
      {asked ? (
        <Asking
          key={asked.groupId ?? 'every'}
          question={`How many fits may run at once for ${asked.name}? It holds from the next fit that is taken up; what runs is left alone.`}
          act="Set the limit"
          keep="Leave it"
          busy={busy ? 'Setting …' : undefined}
          onAct={() => void set(asked, fits ?? 0)}
          onKeep={() => ask(null)}
        >
          <div className="max-w-[200px]">
            <NumberField
              label="Fits at once"
              name="fits"
              integer
              value={fits}
              onValue={setFits}
              error={detailAt(error, 'fits')}
            />
          </div>
        </Asking>
      ) : null}
      <RequestMessage error={error} title="The limit was not set" shown={['fits']} />
      <p role="status" className="mb-1 font-controls text-note text-ink-2">
        {said}
      </p>
    </>
  );
}
