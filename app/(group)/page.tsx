import type { Metadata } from 'next';
import { redirect } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { CreateGroupForm } from '@/components/group/create-group-form';
import { IndexEntry, IndexList, IndexSection } from '@/components/ui/index-list';
import { SingleTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { me, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Groups' };

/** Whoever is in one group goes there at once; `?groups` shows the list all the same. */
export default async function HomePage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  const actor = await visitor('/');
  const { groups } = await me(actor);
  if (groups.length === 1 && (await searchParams).groups === undefined) redirect(`/groups/${groups[0].id}`);
  return (
    <PageChrome version={version} email={actor.email}>
      <Sheet>
        <PageHead
          title={groups.length ? 'Your groups' : 'No group yet'}
          abstract={
            groups.length
              ? undefined
              : 'Measurements and notebooks belong to a group. Create one, or ask a lead to invite you at this address.'
          }
        >
          {groups.length ? null : <SingleTone />}
        </PageHead>
        <SheetRow>
          {groups.length ? (
            <IndexSection title="Groups">
              <IndexList>
                {groups.map(({ id, name, role }, i) => (
                  <IndexEntry
                    key={id}
                    number={i + 1}
                    title={name}
                    href={`/groups/${id}`}
                    note={`as ${role}`}
                  />
                ))}
              </IndexList>
            </IndexSection>
          ) : null}
          <IndexSection title="New group">
            <div className="border-t border-ink pt-2">
              <CreateGroupForm primary={!groups.length} />
            </div>
          </IndexSection>
        </SheetRow>
      </Sheet>
    </PageChrome>
  );
}
