import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { UploadSheet } from '@/components/measurement/upload-sheet';
import { group, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Add a measurement' };

export default async function UploadPage({ params }: { params: Promise<{ id: string }> }) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}/measurements/new`);
  const { name, role, may } = await group(actor, id);
  if (!may.includes('measurement.upload')) notFound();
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={name}
      groupId={id}
      current="measurements"
    >
      <UploadSheet groupId={id} groupName={name} email={actor.email} />
    </PageChrome>
  );
}
