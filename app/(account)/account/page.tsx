import type { Metadata } from 'next';
import { AccountSheet } from '@/components/account/account-sheet';
import { PageChrome } from '@/components/account/page-chrome';
import { me, tokens, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Your account' };

export default async function AccountPage() {
  const actor = await visitor('/account');
  const [person, own] = await Promise.all([me(actor), tokens(actor)]);
  return (
    <PageChrome version={version} email={actor.email}>
      <AccountSheet me={person} tokens={own} />
    </PageChrome>
  );
}
