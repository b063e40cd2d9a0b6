import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { LibrarySheet } from '@/components/measurement/library-sheet';
import { group, measurements, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Measurements' };

export default async function LibraryPage({ params }: { params: Promise<{ id: string }> }) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}/measurements`);
  const opened = await group(actor, id);
  // Readers see what is released, and measurements aren't.
  if (!opened.may.includes('measurement.read')) notFound();
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={opened.role}
      where={opened.name}
      groupId={id}
      current="measurements"
    >
      <LibrarySheet group={opened} initial={await measurements(actor, id)} />
    </PageChrome>
  );
}
