import { MissingPage } from '@/components/account/missing-page';
import { PageChrome } from '@/components/account/page-chrome';
import { guestOrMember, version } from '@/lib/http/page-data';

/** A group that doesn't exist and one of another group look alike. */
export default async function GroupNotFound() {
  const actor = await guestOrMember();
  return (
    <PageChrome version={version} email={actor?.email}>
      <MissingPage thing="group" email={actor?.email ?? null} />
    </PageChrome>
  );
}
