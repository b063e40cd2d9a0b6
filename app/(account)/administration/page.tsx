import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { AdministrationSheet } from '@/components/administration/administration-sheet';
import { administration, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Administration' };

/** For site administrators; to anybody else there is no such page. */
export default async function AdministrationPage() {
  const actor = await visitor('/administration');
  const initial = await administration(actor);
  return (
    <PageChrome version={version} email={actor.email} where="Administration">
      <AdministrationSheet {...initial} reader={actor.userId} />
    </PageChrome>
  );
}
