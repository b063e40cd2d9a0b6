import type { Metadata } from 'next';
import { MissingPage } from '@/components/account/missing-page';
import { PageChrome } from '@/components/account/page-chrome';
import { guestOrMember, version } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Not found' };

/** An address that names nothing, or nothing that the person may see. */
export default async function NotFound() {
  const actor = await guestOrMember();
  return (
    <PageChrome version={version} email={actor?.email}>
      <MissingPage thing="page" email={actor?.email ?? null} />
    </PageChrome>
  );
}
