import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { RevisionsSheet } from '@/components/notebook/revisions-sheet';
import { group, notebook, version, visitor } from '@/lib/http/page-data';

interface Props {
  params: Promise<{ id: string }>;
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  const { title } = await notebook(await visitor(`/notebooks/${id}/revisions`), id);
  return { title: `Revisions of ${title}` };
}

/** `?from=2&to=4` compares those two; without it the standing revision with the one before. */
export default async function RevisionsPage({ params, searchParams }: Props) {
  const { id } = await params;
  const actor = await visitor(`/notebooks/${id}/revisions`);
  const opened = await notebook(actor, id);
  const { role } = await group(actor, opened.groupId);
  const asked = await searchParams;
  const numbered = (given: string | string[] | undefined) => {
    const value = Number(given);
    return opened.record.some(({ revision }) => revision === value) ? value : null;
  };
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={opened.groupName}
      groupId={opened.groupId}
      current="notebooks"
    >
      <RevisionsSheet notebook={opened} from={numbered(asked.from)} to={numbered(asked.to)} />
    </PageChrome>
  );
}
