import type { Metadata } from 'next';
import Link from 'next/link';
import { cookies } from 'next/headers';
import { redirect } from 'next/navigation';
import { lastGroupCookie } from '@/components/account/last-group';
import { PageChrome } from '@/components/account/page-chrome';
import { CreateGroupForm } from '@/components/group/create-group-form';
import { IndexEntry, IndexList, IndexSection } from '@/components/ui/index-list';
import { SingleTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { config } from '@/lib/config';
import { administersSite, me, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Groups' };

/** Leads to the group that was open last, or to the only one; `?groups` shows the list all the same. */
export default async function HomePage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  const actor = await visitor('/');
  const [{ groups }, administers] = await Promise.all([me(actor), administersSite(actor)]);
  if ((await searchParams).groups === undefined) {
    const last = (await cookies()).get(lastGroupCookie(new URL(config().url).port))?.value;
    const known = groups.find(({ id }) => id === last) ?? (groups.length === 1 ? groups[0] : undefined);
    if (known) redirect(`/groups/${known.id}`);
  }
  return (
    <PageChrome version={version} email={actor.email}>
      <Sheet>
        <PageHead
          title={groups.length ? 'Your groups' : 'No group yet'}
          abstract={
            groups.length
              ? undefined
              : `Measurements and notebooks belong to a group. To get into one, ask its lead to invite ${actor.email}; you are a member at once. Or create one of your own.`
          }
        >
          {groups.length ? null : <SingleTone />}
          {administers ? (
            <p>
              You administer this site. <Link href="/administration">Users, queue, workers and storage</Link>
            </p>
          ) : null}
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
