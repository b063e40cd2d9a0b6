import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { MembersSheet } from '@/components/group/members-sheet';
import { group, permissions, version, visitor } from '@/lib/http/page-data';

interface Props {
  params: Promise<{ id: string }>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: `Members of ${(await group(await visitor(`/groups/${id}/members`), id)).name}` };
}

export default async function MembersPage({ params }: Props) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}/members`);
  const initial = await group(actor, id);
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={initial.role}
      where={initial.name}
      groupId={id}
      current="members"
    >
      <MembersSheet initial={initial} reader={actor.userId} permissions={permissions()} />
    </PageChrome>
  );
}
