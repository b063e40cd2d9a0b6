import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { GroupSheet } from '@/components/group/group-sheet';
import { group, version, visitor } from '@/lib/http/page-data';

interface Props {
  params: Promise<{ id: string }>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: (await group(await visitor(`/groups/${id}`), id)).name };
}

export default async function GroupPage({ params }: Props) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}`);
  const initial = await group(actor, id);
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={initial.role}
      where={initial.name}
      groupId={id}
      current="notebooks"
    >
      <GroupSheet initial={initial} />
    </PageChrome>
  );
}
