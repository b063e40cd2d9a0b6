'use client';

import Link from 'next/link';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import { Record } from '@/components/ui/record';
import { shortName } from '@/components/words/people';
import type { GroupLog } from '@/lib/schemas';
import { EventLine } from './event-line';

const shown = 5;

/** The newest lines of the group's log, in the margin of its home. */
export function LatestEvents({ groupId }: { groupId: string }) {
  const { data } = useSWR(`/api/v1/groups/${groupId}/audit?limit=${shown}`, read<GroupLog>);
  return (
    <>
      <h2 className="mb-2 text-[15px]/[21px] text-ink-2 italic">Latest in the log</h2>
      {data?.events.map((event) => (
        <Record key={event.id} at={event.at}>
          <b>{event.actor ? shortName(event.actor.email) : 'Beatnote'}</b> <EventLine event={event} />
        </Record>
      ))}
      <p className="font-controls text-note">
        <Link href={`/groups/${groupId}/log`}>The whole log</Link>
      </p>
    </>
  );
}
