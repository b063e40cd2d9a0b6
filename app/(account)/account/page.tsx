import type { Metadata } from 'next';
import { AccountSheet } from '@/components/account/account-sheet';
import { PageChrome } from '@/components/account/page-chrome';
import { administersSite, me, tokens, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Your account' };

export default async function AccountPage() {
  const actor = await visitor('/account');
  const [person, own, administers] = await Promise.all([me(actor), tokens(actor), administersSite(actor)]);
  return (
    <PageChrome version={version} email={actor.email}>
      <AccountSheet me={person} tokens={own} administers={administers} />
    </PageChrome>
  );
}
