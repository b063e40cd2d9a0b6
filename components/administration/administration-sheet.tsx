'use client';

import useSWR from 'swr';
import { asRequestError, read } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Contents, type ContentsEntry } from '@/components/ui/contents';
import { IndexSection } from '@/components/ui/index-list';
import { Stamp } from '@/components/ui/num';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { fileSize } from '@/components/words/counts';
import type { FitLimits, InstanceState, SiteUsers, StorageState } from '@/lib/schemas';
import { LimitTable } from './limit-table';
import { queueNote, QueueTable, ServiceTable, StorageTable, WorkerTable } from './state-tables';
import { UserTable } from './user-table';

export interface AdministrationSheetProps {
  state: InstanceState;
  storage: StorageState;
  users: SiteUsers;
  limits: FitLimits;
  /** Who looks at it. */
  reader: string;
}

function contentsOf(state: InstanceState, storage: StorageState, users: SiteUsers): ContentsEntry[] {
  const away = state.services.filter((one) => one.state === 'away').length;
  return [
    {
      href: '#services',
      title: 'Services',
      state: away ? { kind: 'bad', word: `${away} away` } : { kind: 'ok', word: 'all answer' },
    },
    { href: '#queue', title: 'Queue', note: queueNote(state.queue) },
    {
      href: '#workers',
      title: 'Workers',
      note: state.workers === null ? 'unknown' : `${state.workers.length} alive`,
    },
    { href: '#limits', title: 'Fits at once' },
    { href: '#users', number: users.count, title: 'Users' },
    {
      href: '#storage',
      title: 'Storage',
      note: fileSize(storage.tableBytes + (storage.objects?.bytes ?? 0)),
    },
  ];
}

/** The site administrator's page: how the instance is, and who may come in. No group's science. */
export function AdministrationSheet(initial: AdministrationSheetProps) {
  const { data: state = initial.state, error } = useSWR('/api/v1/administration', read<InstanceState>, {
    fallbackData: initial.state,
    refreshInterval: 3_000,
  });
  const { data: storage = initial.storage } = useSWR('/api/v1/administration/storage', read<StorageState>, {
    fallbackData: initial.storage,
    refreshInterval: 60_000,
  });
  return (
    <Sheet contents={<Contents label="Of this page" entries={contentsOf(state, storage, initial.users)} />}>
      <PageHead
        title="Administration"
        abstract="Services, queue, workers, storage and users of this site. What groups measure and find is theirs, and isn’t shown here."
      />
      <SheetRow
        margin={
          <p className="font-controls text-note text-ink-2">
            As of <Stamp>{state.at.slice(11, 19)}</Stamp>, asked every three seconds.
          </p>
        }
      >
        <RequestMessage
          error={error === undefined ? null : asRequestError(error)}
          title="The state could not be read; what stands below is the last one known"
        />
        <IndexSection id="services" title="Services">
          <ServiceTable services={state.services} />
        </IndexSection>
        <IndexSection id="queue" title="Queue">
          <QueueTable queue={state.queue} />
        </IndexSection>
        <IndexSection id="workers" title="Workers">
          <WorkerTable workers={state.workers} />
        </IndexSection>
        <IndexSection id="limits" title="Fits at once">
          <LimitTable initial={initial.limits} />
        </IndexSection>
        <IndexSection id="users" title="Users">
          <UserTable initial={initial.users} reader={initial.reader} />
        </IndexSection>
        <IndexSection id="storage" title="Storage">
          <StorageTable storage={storage} />
        </IndexSection>
      </SheetRow>
    </Sheet>
  );
}
