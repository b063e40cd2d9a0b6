import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { MeasurementSheet } from '@/components/measurement/measurement-sheet';
import { group, measurement, version, visitor } from '@/lib/http/page-data';

interface Props {
  params: Promise<{ id: string }>;
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: (await measurement(await visitor(`/measurements/${id}`), id)).name };
}

/** `?version=1` shows that version; without it the newest is shown. */
export default async function MeasurementPage({ params, searchParams }: Props) {
  const { id } = await params;
  const actor = await visitor(`/measurements/${id}`);
  const asked = (await searchParams).version;
  const wanted = asked === undefined ? undefined : Number(asked);
  if (wanted !== undefined && !Number.isSafeInteger(wanted)) notFound();
  const initial = await measurement(actor, id, wanted);
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
      <MeasurementSheet key={initial.version} initial={initial} groupName={name} />
    </PageChrome>
  );
}
