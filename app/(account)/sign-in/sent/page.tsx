import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { BeatFigure } from '@/components/figures/beat-figure';
import { SignInSheet } from '@/components/ui/sign-in-sheet';
import { linkLifetime } from '@/lib/auth/config';
import { config } from '@/lib/config';
import { version } from '@/lib/http/page-data';
import { lifetimeInWords } from '../_components/lifetime';

export const metadata: Metadata = { title: 'A link is on its way' };
export const dynamic = 'force-dynamic';

export default function SentPage() {
  return (
    <PageChrome version={version}>
      <SignInSheet title="A link is on its way" figure={<BeatFigure />}>
        <div className="border-t border-ink pt-2">
          <p>
            It signs you in once, {lifetimeInWords(linkLifetime)}. If no mail comes, look among unwanted mail,
            or <a href="/sign-in">give the address again</a>.
          </p>
          {config().mailFolder === null ? null : (
            <p>
              Mail doesn’t leave this machine: it is in the <a href="/mailbox">mailbox</a>.
            </p>
          )}
        </div>
      </SignInSheet>
    </PageChrome>
  );
}
