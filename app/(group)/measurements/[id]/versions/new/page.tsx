import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { UploadSheet } from '@/components/measurement/upload-sheet';
import { group, measurement, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Add a newer version' };

export default async function NewVersionPage({ params }: { params: Promise<{ id: string }> }) {
  const { id } = await params;
  const actor = await visitor(`/measurements/${id}/versions/new`);
  const { groupId, name, newest, simulated, may, resting } = await measurement(actor, id);
  if (!may.includes('measurement.upload')) notFound();
  const { name: groupName, role } = await group(actor, groupId);
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={groupName}
      groupId={groupId}
      current="measurements"
    >
      <UploadSheet
        groupId={groupId}
        groupName={groupName}
        email={actor.email}
        onto={{ id, name, newest, simulated, notebooks: resting.length }}
      />
    </PageChrome>
  );
}
