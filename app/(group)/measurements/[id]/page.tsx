import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { MeasurementSheet } from '@/components/measurement/measurement-sheet';
import { group, measurement, version, visitor } from '@/lib/http/page-data';

interface Props {
  params: Promise<{ id: string }>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: (await measurement(await visitor(`/measurements/${id}`), id)).name };
}

export default async function MeasurementPage({ params }: Props) {
  const { id } = await params;
  const actor = await visitor(`/measurements/${id}`);
  const initial = await measurement(actor, id);
  const { name, role } = await group(actor, initial.groupId);
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={name}
      groupId={initial.groupId}
      current="measurements"
    >
      <MeasurementSheet initial={initial} groupName={name} />
    </PageChrome>
  );
}
