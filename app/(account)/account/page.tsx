import type { Metadata } from 'next';
import { AccountSheet } from '@/components/account/account-sheet';
import { PageChrome } from '@/components/account/page-chrome';
import { administersSite, me, settings, tokens, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Your account' };

export default async function AccountPage() {
  const actor = await visitor('/account');
  const [person, own, chosen, administers] = await Promise.all([
    me(actor),
    tokens(actor),
    settings(actor),
    administersSite(actor),
  ]);
  return (
    <PageChrome version={version} email={actor.email}>
      <AccountSheet me={person} tokens={own} settings={chosen} administers={administers} />
    </PageChrome>
  );
}
