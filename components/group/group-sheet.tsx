'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import { Button } from '@/components/ui/button';
import { Contents, type ContentsEntry } from '@/components/ui/contents';
import { EmptyState } from '@/components/ui/empty-state';
import { IndexSection } from '@/components/ui/index-list';
import { BeatRule, SingleTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Record } from '@/components/ui/record';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { counted } from '@/components/words/counts';
import { isRunning } from '@/components/fit/fit-words';
import type { Group } from '@/lib/schemas';
import { MeasurementIndex } from './measurement-index';
import { LatestEvents } from './latest-events';
import { Members } from './members';
import { NotebookIndex } from './notebook-index';
import { membersLine } from './role-words';

/** The list at the left: how many of each, and what stands out. */
export function groupContents(group: Group): ContentsEntry[] {
  const running = group.notebooks.filter(({ lastFit }) => lastFit && isRunning(lastFit.status)).length;
  const { notebooks, measurements, members, invitations } = group;
  return [
    {
      href: '#notebooks',
      number: notebooks.filter(({ archivedAt }) => archivedAt === null).length,
      title: 'Notebooks',
      note: notebooks.length === 0 ? 'none yet' : running ? `${running} sampling` : undefined,
    },
    {
      href: '#measurements',
      number: measurements.length,
      title: 'Measurements',
      note: measurements.length === 0 ? 'none yet' : undefined,
    },
    {
      href: '#members',
      number: members.length,
      title: 'Members',
      note: invitations.length
        ? `${counted(invitations.length, 'invitation')} out`
        : members.length === 1
          ? 'you'
          : undefined,
    },
  ];
}

function Notebooks({ group, onChanged }: { group: Group; onChanged: () => void }) {
  const { id, notebooks, measurements, may } = group;
  const create = may.includes('notebook.create');
  const upload = may.includes('measurement.upload');
  const reason = measurements.length ? undefined : 'A notebook is opened on a measurement.';
  if (notebooks.length)
    return (
      <IndexSection
        id="notebooks"
        title="Notebooks"
        action={create ? <Button href={`/groups/${id}/notebooks/new`}>New notebook</Button> : null}
      >
        <NotebookIndex
          notebooks={notebooks}
          restorable={may.includes('notebook.archive')}
          onChanged={onChanged}
        />
      </IndexSection>
    );
  const actions = measurements.length ? (
    create ? (
      <Button kind="primary" href={`/groups/${id}/notebooks/new`}>
        New notebook
      </Button>
    ) : null
  ) : upload ? (
    <Button kind="primary" href={`/groups/${id}/measurements/new`}>
      Add a measurement
    </Button>
  ) : null;
  return (
    <IndexSection id="notebooks" title="Notebooks">
      <EmptyState actions={actions}>
        {group.role === 'reader'
          ? 'Nothing is released yet. Readers see notebooks once they are.'
          : reason
            ? 'No notebook yet. A notebook is opened on a measurement, so the measurement comes first.'
            : 'No notebook yet. It holds one inference: measurement, template, priors, chains and posterior.'}
      </EmptyState>
    </IndexSection>
  );
}

function Measurements({ group }: { group: Group }) {
  const { id, measurements, may } = group;
  if (!measurements.length && group.role === 'reader') return null;
  return (
    <IndexSection
      id="measurements"
      title="Measurements"
      action={
        may.includes('measurement.upload') && measurements.length ? (
          <Button href={`/groups/${id}/measurements/new`}>Add a measurement</Button>
        ) : null
      }
    >
      {measurements.length ? (
        <MeasurementIndex measurements={measurements} />
      ) : (
        <EmptyState>
          No measurement yet. A file of binned points comes first, with mocks or a covariance.
        </EmptyState>
      )}
    </IndexSection>
  );
}

/** A group's home: notebooks, measurements, members. */
export function GroupSheet({ initial }: { initial: Group }) {
  const { data: group = initial, mutate } = useSWR(`/api/v1/groups/${initial.id}`, read<Group>, {
    fallbackData: initial,
  });
  const nothing = group.notebooks.length === 0 && group.measurements.length === 0;
  return (
    <Sheet contents={<Contents label="Of this group" entries={groupContents(group)} />}>
      <PageHead
        title={group.name}
        byline={membersLine(group.members)}
        margin={
          <Record
            at={group.createdAt}
          >{`Group created, now ${counted(group.members.length, 'member')}`}</Record>
        }
      >
        {nothing ? <SingleTone /> : <BeatRule />}
      </PageHead>
      <SheetRow margin={group.may.includes('group.audit') ? <LatestEvents groupId={group.id} /> : undefined}>
        <Notebooks group={group} onChanged={() => void mutate()} />
        <Measurements group={group} />
        <Members group={group} />
      </SheetRow>
    </Sheet>
  );
}
