'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, read, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { EmptyState } from '@/components/ui/empty-state';
import { FieldPair, SelectField } from '@/components/ui/field';
import { Stamp } from '@/components/ui/num';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { DataTable } from '@/components/ui/table';
import { shortName } from '@/components/words/people';
import { logKinds, type GroupLog, type LogKind } from '@/lib/schemas';
import { EventLine } from './event-line';
import { filterQuery, type LogFilter } from './log-filter';

const kindWords: Record<LogKind, string> = {
  people: 'people and the group',
  measurement: 'measurements',
  notebook: 'notebooks',
  fit: 'fits',
};

/** The part before @, where it tells people apart; else the whole address. */
function nameOf(email: string, people: GroupLog['people']): string {
  const short = shortName(email);
  return people.filter((one) => shortName(one.email) === short).length > 1 ? email : short;
}

export interface LogSheetProps {
  groupId: string;
  groupName: string;
  filter: LogFilter;
  first: GroupLog;
}

/** The log of a group: a filter by person and kind stands in the address; older lines are added below. */
export function LogSheet({ groupId, groupName, filter, first }: LogSheetProps) {
  const router = useRouter();
  const key = filterQuery(filter);
  const [older, setOlder] = useState<{ key: string; pages: GroupLog[] }>({ key, pages: [] });
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');
  // Pages of another filter are of no use to this one; the fields stay, and with them the focus.
  const added = older.key === key ? older.pages : [];
  const pages = [first, ...added];
  const events = pages.flatMap((page) => page.events);
  const next = pages[pages.length - 1].next;

  async function addOlder() {
    if (busy || next === null) return;
    setBusy(true);
    setError(null);
    try {
      const page = await read<GroupLog>(`/api/v1/groups/${groupId}/audit${filterQuery(filter, next)}`);
      setOlder({ key, pages: [...added, page] });
      setSaid(`${events.length + page.events.length} lines are shown.`);
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
    setBusy(false);
  }

  const go = (changed: LogFilter) =>
    router.replace(`/groups/${groupId}/log${filterQuery({ ...filter, ...changed })}`, { scroll: false });

  return (
    <Sheet>
      <PageHead
        title="Log"
        kicker={groupName}
        abstract="Who did what when, newest first. Nothing in it is ever changed or deleted, and it holds no measured or fitted value."
      />
      <SheetRow>
        <FieldPair>
          <SelectField
            label="By"
            name="person"
            value={filter.person ?? ''}
            onChange={(event) => go({ person: event.target.value || undefined })}
            options={[
              { value: '', label: 'everyone' },
              ...first.people.map(({ userId, email }) => ({ value: userId, label: email })),
            ]}
          />
          <SelectField
            label="About"
            name="kind"
            value={filter.kind ?? ''}
            onChange={(event) => go({ kind: logKinds.find((kind) => kind === event.target.value) })}
            options={[
              { value: '', label: 'everything' },
              ...logKinds.map((kind) => ({ value: kind, label: kindWords[kind] })),
            ]}
          />
        </FieldPair>
        {events.length ? (
          <DataTable
            label="Log of the group"
            ruled
            phoneColumns="minmax(0,1fr)"
            columns={[
              { key: 'at', head: 'When', phone: { area: '1 / 1' } },
              { key: 'who', head: 'Who', phone: { area: '2 / 1' } },
              { key: 'what', head: 'What', phone: { area: '3 / 1' } },
            ]}
            rows={events.map((event) => ({
              key: event.id,
              cells: {
                at: <Stamp at={event.at} />,
                who: event.actor ? nameOf(event.actor.email, first.people) : 'Beatnote itself',
                what: <EventLine event={event} />,
              },
            }))}
          />
        ) : (
          <div className="mt-4">
            <EmptyState
              actions={
                filter.person || filter.kind ? (
                  <Button onClick={() => go({ person: undefined, kind: undefined })}>Show everything</Button>
                ) : null
              }
            >
              {filter.person || filter.kind
                ? 'Nothing in the log is of this kind by this person.'
                : 'Nothing was done in this group yet.'}
            </EmptyState>
          </div>
        )}
        <RequestMessage error={error} title="Older lines could not be read" />
        {next === null ? null : (
          <Buttons>
            <Button onClick={() => void addOlder()} busy={busy ? 'Reading …' : undefined}>
              Older lines
            </Button>
          </Buttons>
        )}
        <p role="status" className="sr-only">
          {said}
        </p>
      </SheetRow>
    </Sheet>
  );
}
