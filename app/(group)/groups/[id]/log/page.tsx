import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { LogSheet } from '@/components/group/log-sheet';
import { group, groupLog, version, visitor } from '@/lib/http/page-data';
import { logQuerySchema } from '@/lib/schemas';

interface Props {
  params: Promise<{ id: string }>;
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: `Log of ${(await group(await visitor(`/groups/${id}/log`), id)).name}` };
}

/** `?person=…&kind=…` filter it; what isn't a filter is left out of account. */
export default async function LogPage({ params, searchParams }: Props) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}/log`);
  const { person, kind } = await searchParams;
  const asked = logQuerySchema.safeParse({ person, kind });
  const query = asked.success ? asked.data : logQuerySchema.parse({});
  const [{ name, role }, first] = await Promise.all([group(actor, id), groupLog(actor, id, query)]);
  const filter = { person: query.person, kind: query.kind };
  return (
    <PageChrome version={version} email={actor.email} role={role} where={name} groupId={id} current="log">
      <LogSheet groupId={id} groupName={name} filter={filter} first={first} />
    </PageChrome>
  );
}
