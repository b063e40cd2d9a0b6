import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { MailText } from '@/components/account/mail-text';
import { PageChrome } from '@/components/account/page-chrome';
import { EmptyState } from '@/components/ui/empty-state';
import { Stamp } from '@/components/ui/num';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { version } from '@/lib/http/page-data';
import { listMailbox } from '@/lib/mail';

export const metadata: Metadata = { title: 'Mailbox' };
export const dynamic = 'force-dynamic';

export default async function MailboxPage() {
  const mails = await listMailbox();
  if (!mails) notFound();
  return (
    <PageChrome version={version} where="Mail of this machine">
      <Sheet>
        <PageHead
          title="Mailbox"
          abstract="Mail doesn’t leave this machine. What would have been sent is here, newest first."
        />
        <SheetRow>
          {mails.length === 0 ? (
            <EmptyState>No mail yet. A sign-in link comes here when somebody asks for one.</EmptyState>
          ) : (
            <ol>
              {mails.map((mail) => (
                <li
                  key={mail.id}
                  className="grid grid-cols-[200px_minmax(0,1fr)] gap-x-4 border-t border-hairline pt-[13px] pb-2 first:border-ink max-tablet:grid-cols-1"
                >
                  <div className="font-controls text-note text-ink-2">
                    <Stamp at={mail.sentAt} />
                    <div className="wrap-anywhere">to {mail.to}</div>
                  </div>
                  <div>
                    <h2 className="text-entry">{mail.subject}</h2>
                    <MailText text={mail.text} links={mail.links} />
                  </div>
                </li>
              ))}
            </ol>
          )}
        </SheetRow>
      </Sheet>
    </PageChrome>
  );
}
